import { fileURLToPath } from 'node:url';
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { signInAs, startSite } from '../helpers/site.ts';
import type { Site, SitePage } from '../helpers/site.ts';

/**
 * The main job as one person does it in a browser: read the answer of the demo, bring in a log of one's own
 * (the sample station's `alternate`, worked independently in R 4.2.2: 1,027 units of 77 stations in 4 nights,
 * estimate -0.75 dB, interval -1.23 to -0.27), correct the switch log, see the answer follow, take it back.
 */
const files = fileURLToPath(new URL('../reference/sample-station/', import.meta.url));
const workedInR =
  /BRAVO hears 0\.8\u2009dB better than ALPHA on every band, 95\u2009% interval 0\.3 to 1\.2\u2009dB, from 1\u2009027 units of 77 stations in 4 nights\./;

let site: Site;
let browser: SitePage;
let page: Page;
let station: string;

beforeAll(async () => {
  site = await startSite();
  browser = await site.open();
  page = browser.page;
  page.setDefaultTimeout(30_000);
});
afterAll(() => site?.close());

async function bringIn(kind: 'Spots' | 'Switch log', file: string, makeNames: boolean): Promise<string> {
  await page.goto(`${station}/imports`);
  await page.getByLabel(kind, { exact: true }).check();
  await page.locator('input[type=file]').setInputFiles(files + file);
  await page.waitForURL(/imports\/\d+/);
  if (makeNames) await page.getByLabel(/make/i).first().check();
  await page.getByText(/Of the first \d+ lines, [1-9]\d* can be taken/).waitFor();
  await page.getByRole('button', { name: 'Start the import' }).click();
  await page.getByRole('button', { name: 'Undo this import' }).waitFor();
  return page.locator('main').innerText();
}

async function choose(blank: number, antenna: string): Promise<void> {
  await page.locator('.sentence button').nth(blank).click();
  await page.getByRole('dialog').getByText(antenna, { exact: true }).click();
  await page.getByRole('dialog').waitFor({ state: 'hidden' });
}

describe('the main job in a browser', () => {
  it('answers the demo station’s question with a sentence that holds the interval and the evidence', async () => {
    station = await signInAs(page, 'analyst');
    await page.goto(`${station}/compare`);
    const verdict = page.getByText(
      /95\u2009% interval .* from [\d\u2009]+ units of [\d\u2009]+ stations in \d+ nights\./,
    );
    await verdict.first().waitFor();
    await page.getByRole('heading', { name: 'When', exact: true }).waitFor();
    expect(await page.locator('figure canvas').count()).toBeGreaterThanOrEqual(4);
  });

  it('brings in a switch log and spots, and answers as worked in R', async () => {
    expect(await bringIn('Switch log', 'alternate-dwells.csv', true)).toContain('480 dwells stored');
    expect(await bringIn('Spots', 'alternate-spots.csv', false)).toMatch(/6.422 spots stored/);
    await page.goto(`${station}/compare`);
    await page.getByRole('heading', { name: 'Compare', level: 1 }).waitFor();
    await choose(0, 'ALPHA');
    await choose(1, 'BRAVO');
    await page.getByText(workedInR).first().waitFor();
    // The address holds the whole question: a reload asks it again.
    await page.reload();
    await page.getByText(workedInR).first().waitFor();
  });

  it('previews a correction of the switch log, and the answer follows within seconds', async () => {
    const question = page.url();
    await page.goto(`${station}/switching?from=2026-01-05T17:00:00Z&to=2026-01-06T05:00:00Z`);
    await page.getByRole('button', { name: 'List' }).click();
    await page.locator('tr', { hasText: '18:15:00Z' }).first().getByRole('button').first().click();
    await page.getByRole('button', { name: 'Delete', exact: true }).click();
    const preview = page.getByRole('dialog');
    await preview.getByText('3 spots lose their antenna').waitFor();
    await preview.getByRole('button', { name: 'Apply' }).click();
    await preview.waitFor({ state: 'hidden' });
    await page.goto(question);
    await page
      .getByText(/from 1\u200902\d units of 7\d stations in 4 nights\./)
      .first()
      .waitFor();
    await page.waitForFunction(() => !document.body.innerText.includes('from 1\u2009027 units'));
  });

  it('takes the correction back, and the answer with it', async () => {
    const question = page.url();
    await page.goto(`${station}/switching?from=2026-01-05T17:00:00Z&to=2026-01-06T05:00:00Z`);
    await page.getByRole('button', { name: /^Undo/ }).first().click();
    await page.getByRole('dialog').getByRole('button', { name: 'Take it back' }).click();
    await page.getByRole('dialog').waitFor({ state: 'hidden' });
    await page.goto(question);
    await page.getByText(workedInR).first().waitFor();
    expect(browser.errors).toEqual([]);
  });
});

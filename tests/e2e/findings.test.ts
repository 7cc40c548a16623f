import { readFile } from 'node:fs/promises';
import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { axeFindings, signInAs, startSite } from '../helpers/site.ts';
import type { Site, SitePage } from '../helpers/site.ts';

/**
 * A finding's whole life as its people see it: an answer is frozen, found again, asked of today's data, decided on,
 * printed, shown to a guest without an account, and taken back from the guest.
 */
const title = 'Is the new wire worth its mast';
const reason = 'Better on every night but one; the mast stays.';
const looks = [
  { width: 1440, scheme: 'dark' },
  { width: 1440, scheme: 'light' },
  { width: 390, scheme: 'dark' },
] as const;

let site: Site;
let analyst: SitePage;
let page: Page;
let station: string;
/** Paths, as the site's own name is not the one that the tests reach it by. */
let report: string;
let guestLink: string;

beforeAll(async () => {
  site = await startSite();
  analyst = await site.open();
  page = analyst.page;
  page.setDefaultTimeout(30_000);
  station = await signInAs(page, 'analyst');
});
afterAll(() => site?.close());

async function bytesOf(opened: Page, button: string): Promise<{ name: string; bytes: Buffer }> {
  const [download] = await Promise.all([
    opened.waitForEvent('download'),
    opened.getByRole('button', { name: button }).click(),
  ]);
  return { name: download.suggestedFilename(), bytes: await readFile((await download.path())!) };
}

describe('a finding in a browser', () => {
  it('is frozen from Compare with a title of one’s own, and opens as its report', async () => {
    await page.goto(`${station}/compare`);
    const freeze = page.getByRole('button', { name: 'Freeze as finding' });
    await page.locator('#verdict-sentence').waitFor();
    const verdict = await page.locator('#verdict-sentence').innerText();
    await freeze.click();
    const dialog = page.getByRole('dialog');
    await dialog.getByLabel('Title').fill('');
    await dialog.getByRole('button', { name: 'Freeze' }).click();
    await dialog.getByText('This cannot be empty.').waitFor();
    await dialog.getByLabel('Title').fill(title);
    await dialog.getByLabel(/^Note/).fill('Before the first frost.');
    await dialog.getByRole('button', { name: 'Freeze' }).click();
    await page.waitForURL(/\/reports\/\d+$/);
    report = new URL(page.url()).pathname;
    await page.getByRole('heading', { level: 1, name: title }).waitFor();
    await page.getByText('Before the first frost.').waitFor();
    // The night that still goes on may move the digits; what is compared stays.
    expect(await page.locator('#verdict-sentence').innerText()).toContain(verdict.split(' hears ')[0]);
    await page.getByRole('heading', { name: 'When', exact: true }).waitFor();
    expect(await page.locator('figure canvas').count()).toBeGreaterThanOrEqual(4);
    expect(await page.locator('code').first().innerText()).toMatch(/^([0-9a-f]{8}\s*){8}$/);
  });

  it('gives the same numbers when today’s data are asked', async () => {
    await page.getByRole('button', { name: "Ask today's data" }).click();
    await page.locator('.recompute').getByText('Same data, same numbers.').waitFor();
    const table = await page.getByRole('region', { name: 'Numbers then and now' }).innerText();
    expect(table).toContain('When it was frozen');
    expect(table).not.toContain('(changed)');
  });

  it('keeps a decision with its reason, and nothing of a form is lost by closing it', async () => {
    await page.getByRole('button', { name: 'Decide', exact: true }).click();
    const dialog = page.getByRole('dialog');
    await dialog.getByLabel('Why').fill(reason);
    await dialog.getByRole('button', { name: 'Write it down' }).click();
    await dialog.getByText('Choose one of the four.').waitFor();
    await dialog.getByRole('button', { name: 'Close' }).click();
    await page.getByRole('button', { name: 'Decide', exact: true }).click();
    expect(await dialog.getByLabel('Why').inputValue()).toBe(reason);
    await dialog.getByLabel('Look again').check();
    await dialog.getByRole('button', { name: 'Write it down' }).click();
    await dialog.getByText('Give a date for "look again"').waitFor();
    await dialog.getByLabel('On', { exact: true }).fill('2099-03-01');
    await dialog.getByRole('button', { name: 'Write it down' }).click();
    const decision = page.getByRole('region', { name: 'Decision' });
    await decision.getByText('Look again on 2099-03-01').waitFor();
    expect(await decision.innerText()).toContain(reason);
    // A second one counts instead; the first stays to be read.
    await page.getByRole('button', { name: 'Decide anew' }).click();
    await dialog.getByLabel('Keep').check();
    await dialog.getByLabel('Why').fill('The frost did it no harm.');
    await dialog.getByRole('button', { name: 'Write it down' }).click();
    await decision.getByText('Earlier decisions (1)').click();
    await decision.getByText(reason).waitFor();
  });

  it('stands in Reports, where it is found by its decision', async () => {
    await page.goto(`${station}/reports`);
    const line = page.getByRole('listitem').filter({ has: page.getByRole('link', { name: title }) });
    await line.getByText('Keep').waitFor();
    await page.getByLabel('Decision').selectOption('Rebuild');
    await page.getByText('No finding fits').waitFor();
    expect(page.url()).toContain('decision=rebuild');
    await page.getByRole('button', { name: 'Show all' }).click();
    await line.waitFor();
  });

  it('is printed on paper and its units are saved as CSV', async () => {
    await page.goto(report);
    for (const button of ['PDF A4', 'PDF Letter']) {
      const { name, bytes } = await bytesOf(page, button);
      expect(name).toMatch(/\.pdf$/);
      expect(bytes.subarray(0, 5).toString('latin1')).toBe('%PDF-');
    }
    const { bytes } = await bytesOf(page, 'CSV of units');
    const lines = bytes.toString('utf8').trim().split(/\r?\n/);
    const units = await page.locator('.facts dd').first().innerText();
    expect(lines.length - 1).toBe(Number(units.replaceAll(/\D/g, '')));
  });

  it('is read by a guest through a link that is shown once and never stands in an address', async () => {
    await page.getByRole('button', { name: 'Share', exact: true }).click();
    const dialog = page.getByRole('dialog');
    await dialog.getByLabel('For', { exact: true }).fill('The farmer');
    await dialog.getByLabel(/^Good for/).fill('7');
    await dialog.getByRole('button', { name: 'Make the link' }).click();
    const link = new URL(await page.getByLabel('Link for the guest').inputValue());
    guestLink = link.pathname + link.hash;
    expect(guestLink).toMatch(/^\/f#[\w-]{20,}$/);
    await page.getByRole('button', { name: 'I have copied it' }).click();

    const guest = await site.open();
    const asked: string[] = [];
    guest.page.on('request', (request) => asked.push(request.url()));
    await guest.page.goto(guestLink);
    await guest.page.getByRole('heading', { level: 1, name: title }).waitFor();
    await guest.page.getByRole('heading', { name: 'When', exact: true }).waitFor();
    expect(await guest.page.locator('meta[name=robots]').getAttribute('content')).toContain('noindex');
    expect(await guest.page.getByRole('navigation').count()).toBe(0);
    await guest.page.waitForURL(/\/f$/);
    expect(asked.filter((url) => url.includes(link.hash.slice(1)))).toEqual([]);
    // A phone throws the page away and loads it anew: the guest has nothing but the link.
    await guest.page.reload();
    await guest.page.getByRole('heading', { level: 1, name: title }).waitFor();
    expect((await bytesOf(guest.page, 'PDF A4')).bytes.subarray(0, 5).toString('latin1')).toBe('%PDF-');
    expect(guest.errors).toEqual([]);
    await guest.close();
  });

  for (const look of looks) {
    for (const reader of ['guest', 'member'] as const) {
      const name = `${reader} at ${look.width} px, ${look.scheme}`;

      it(`has no serious accessibility finding and no sideways scroll for a ${name}`, async () => {
        const visit = await site.open({ ...look, height: 844 });
        if (reader === 'member') await signInAs(visit.page, 'analyst');
        await visit.page.goto(reader === 'member' ? report : guestLink);
        await visit.page.getByRole('heading', { name: 'When', exact: true }).waitFor();
        const found = await axeFindings(visit.page);
        const wrong = found.map(({ id, where }) => `${id} at ${where.join(', ')}`);
        const sideways = await visit.page.evaluate(
          () => document.documentElement.scrollWidth - document.documentElement.clientWidth,
        );
        if (sideways > 0) wrong.push(`scrolls sideways by ${sideways} px`);
        expect([...wrong, ...visit.errors]).toEqual([]);
        await visit.close();
      });
    }
  }

  it('shows the guest nothing once the link is withdrawn, and says so', async () => {
    await page.reload();
    const shares = page.getByRole('region', { name: 'Links for guests' });
    await shares.getByRole('row', { name: /The farmer/ }).waitFor();
    await page.getByRole('button', { name: 'Withdraw the link for The farmer' }).click();
    await page.getByRole('dialog').getByRole('button', { name: 'Withdraw' }).click();
    await shares.getByText(/withdrawn/).waitFor();
    const guest = await site.open();
    await guest.page.goto(guestLink);
    await guest.page.getByText('This link has expired, was withdrawn or was never given out.').waitFor();
    expect(await guest.page.locator('main').innerText()).not.toContain(title);
    await guest.close();
    expect(analyst.errors).toEqual([]);
  });

  it('is read by a contester, who is offered nothing that changes it', async () => {
    const { page: other, close } = await site.open();
    await signInAs(other, 'contester');
    await other.goto(report);
    await other.getByRole('heading', { name: 'The frozen record' }).waitFor();
    for (const name of ['Decide', 'Decide anew', 'Share', 'Make a link'])
      expect(await other.getByRole('button', { name, exact: true }).count()).toBe(0);
    await other.goto(`${station}/compare`);
    await other.locator('#verdict-sentence').waitFor();
    expect(await other.getByRole('button', { name: 'Freeze as finding' }).count()).toBe(0);
    await close();
  });
});

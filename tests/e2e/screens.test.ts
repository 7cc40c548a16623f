import type { Page } from 'playwright-core';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { axeFindings, signInAs, startSite } from '../helpers/site.ts';
import type { Site } from '../helpers/site.ts';

/** Every screen a person can reach, with who looks at it. A page added to the rail is found by the last test. */
const screens = [
  ['tonight', 'contester'],
  ['compare', 'analyst'],
  ['ladder', 'analyst'],
  ['trials', 'analyst'],
  ['reports', 'analyst'],
  ['switching', 'operator'],
  ['spots', 'operator'],
  ['imports', 'operator'],
  ['station', 'manager'],
  ['members', 'manager'],
  ['methods', 'contester'],
  ['settings', 'manager'],
] as const;
const publicScreens = ['/sign-in', '/password-reset', '/demo-mail', '/f', '/no-such-page'];
const looks = [
  { width: 1440, height: 900, scheme: 'dark' },
  { width: 1440, height: 900, scheme: 'light' },
  { width: 390, height: 844, scheme: 'dark' },
] as const;

let site: Site;
beforeAll(async () => {
  site = await startSite();
});
afterAll(() => site?.close());

/** What is wrong with the screen as it stands, in sentences; nothing when all is well. */
async function lookAt(page: Page, label: string): Promise<string[]> {
  await page.locator('h1').first().waitFor();
  await page.waitForLoadState('load');
  // The busy faces are gone when nothing says that it is loading.
  await page.waitForFunction(() => !document.querySelector('[aria-busy="true"]'));
  const findings = (await axeFindings(page)).map(
    (f) => `${label}: ${f.id} (${f.impact}) at ${f.where.join(', ')}`,
  );
  const sideways = await page.evaluate(
    () => document.documentElement.scrollWidth - document.documentElement.clientWidth,
  );
  if (sideways > 0) findings.push(`${label}: scrolls sideways by ${sideways} px`);
  const headings = await page.locator('h1').count();
  if (headings !== 1) findings.push(`${label}: has ${headings} h1`);
  return findings;
}

describe('every screen', () => {
  for (const look of looks) {
    const name = `${look.width} px, ${look.scheme}`;

    it(`has no serious accessibility finding, no sideways scroll and no console error at ${name}`, async () => {
      const findings: string[] = [];
      const strangers = await site.open(look);
      for (const path of publicScreens) {
        await strangers.page.goto(path);
        findings.push(...(await lookAt(strangers.page, path)));
      }
      findings.push(...strangers.errors);
      await strangers.close();

      for (const role of new Set(screens.map(([, who]) => who))) {
        const { page, errors, close } = await site.open(look);
        const station = await signInAs(page, role);
        for (const [screen] of screens.filter(([, who]) => who === role)) {
          await page.goto(`${station}/${screen}`);
          findings.push(...(await lookAt(page, screen)));
          expect(page.url()).toContain(`${station}/${screen}`);
        }
        findings.push(...errors);
        await close();
      }
      expect(findings).toEqual([]);
    });
  }

  it('that the rail offers to a manager is among those looked at', async () => {
    const { page, close } = await site.open();
    await signInAs(page, 'manager');
    const links = await page
      .locator('nav a[href*="/s/"]')
      .evaluateAll((all) => all.map((a) => a.getAttribute('href')));
    const reached = new Set(links.map((href) => /\/s\/\d+\/(\w+)/.exec(href ?? '')?.[1]).filter(Boolean));
    expect(reached.size).toBeGreaterThan(5);
    expect([...reached].filter((screen) => !screens.some(([known]) => known === screen))).toEqual([]);
    await close();
  });
});

describe('the first page on a cold cache', () => {
  it('needs at most 200 kB of compressed JavaScript before it shows', async () => {
    const { page, close } = await site.open();
    const { gzipSync } = await import('node:zlib');
    let bytes = 0;
    const sizes: Promise<void>[] = [];
    page.on('response', (response) => {
      if (!/javascript/.test(response.headers()['content-type'] ?? '')) return;
      sizes.push(response.body().then((body) => void (bytes += gzipSync(body).length)));
    });
    await page.goto('/sign-in');
    await page.locator('h1').waitFor();
    await Promise.all(sizes);
    expect(bytes).toBeGreaterThan(20_000);
    expect(bytes).toBeLessThanOrEqual(200 * 1024);
    await close();
  });
});

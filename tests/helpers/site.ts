import type { ChildProcess } from 'node:child_process';
import { spawn } from 'node:child_process';
import { createInterface } from 'node:readline';
import { fileURLToPath } from 'node:url';
import axe from 'axe-core';
import pg from 'pg';
import { chromium } from 'playwright-core';
import type { Browser, BrowserContext, Page } from 'playwright-core';
import { inject } from 'vitest';
import { startLineServer } from '../../worker/fake-feed/line-server.ts';
import { databaseUrl, dropDatabase, nameDatabase } from './database-names.ts';

const root = fileURLToPath(new URL('../..', import.meta.url));

export interface Site {
  url: string;
  databaseUrl: string;
  browser: Browser;
  /** The feed that the worker reads: send it spot lines. */
  feed: Awaited<ReturnType<typeof startLineServer>>;
  /** A fresh browser profile. Console errors and failed scripts are collected. */
  open(options?: { width?: number; height?: number; scheme?: 'dark' | 'light' }): Promise<SitePage>;
  close(): Promise<void>;
}

export interface SitePage {
  page: Page;
  context: BrowserContext;
  /** What the browser's console called an error, and exceptions nobody caught. */
  errors: string[];
  close(): Promise<void>;
}

/**
 * The product as it is delivered: the built server and worker as processes of their own, the built client, a
 * copy of the demo database, Debian's Chromium. Only the public network is a local stand-in.
 */
export async function startSite(): Promise<Site> {
  const adminUrl = inject('adminDatabaseUrl');
  const name = nameDatabase('test');
  const admin = new pg.Client(adminUrl);
  await admin.connect();
  await admin.query(`CREATE DATABASE ${name} TEMPLATE ${inject('demoDatabase')} STRATEGY file_copy`);
  const url = databaseUrl(adminUrl, name);
  const feed = await startLineServer({ port: 0 });
  const database = new pg.Client(url);
  await database.connect();
  await database.query('UPDATE feed SET port = $1', [feed.port]);
  await database.end();

  const server = await startProcess('dist/server.js', {
    DATABASE_URL: url,
    PORT: '0',
    DEMO: '1',
    JWT_SECRET: 'only for tests, thirty-two characters long',
    CLIENT_FOLDER: `${root}dist/client`,
  });
  const worker = await startProcess('dist/worker.js', {
    DATABASE_URL: url,
    JWT_SECRET: 'unused by the worker but at hand',
  });
  const browser = await chromium.launch({
    executablePath: process.env.CHROMIUM_PATH ?? '/usr/bin/chromium',
    args: ['--no-sandbox', '--disable-gpu', '--disable-background-networking', '--disable-component-update'],
  });
  const siteUrl = `http://127.0.0.1:${server.port}`;

  return {
    url: siteUrl,
    databaseUrl: url,
    browser,
    feed,
    async open({ width = 1440, height = 900, scheme = 'dark' } = {}) {
      const context = await browser.newContext({
        baseURL: siteUrl,
        viewport: { width, height },
        colorScheme: scheme,
        reducedMotion: 'reduce',
        hasTouch: width < 500,
      });
      const page = await context.newPage();
      const errors: string[] = [];
      page.on('console', (message) => {
        if (message.type() === 'error') errors.push(`${message.text()} (${page.url()})`);
      });
      page.on('pageerror', (error) => errors.push(`${error.message} (${page.url()})`));
      return { page, context, errors, close: () => context.close() };
    },
    async close() {
      await browser.close();
      await Promise.all([stopProcess(worker.child), stopProcess(server.child)]);
      await feed.close();
      await dropDatabase(admin, name);
      await admin.end();
    },
  };
}

/** Signs in as one of the demo's people with the one click that the page offers. */
export async function signInAs(
  page: Page,
  role: 'manager' | 'operator' | 'analyst' | 'contester',
): Promise<string> {
  await page.goto('/sign-in');
  await page
    .getByRole('button', { name: new RegExp(role) })
    .first()
    .click();
  await page.waitForURL(/\/s\/\d+\//);
  return /\/s\/\d+/.exec(page.url())![0];
}

export interface AxeFinding {
  id: string;
  impact: string;
  where: string[];
}

/** Serious and critical findings of axe-core on the page as it stands. */
export async function axeFindings(page: Page): Promise<AxeFinding[]> {
  // By evaluate, not by a script tag: the site's content security policy forbids foreign scripts.
  await page.evaluate(axe.source);
  const violations = await page.evaluate(async () => {
    const inPage = (
      window as unknown as { axe: { run: (o: object) => Promise<{ violations: AxeViolation[] }> } }
    ).axe;
    type AxeViolation = { id: string; impact: string | null; nodes: { target: unknown[] }[] };
    return (await inPage.run({ resultTypes: ['violations'] })).violations.map((v) => ({
      id: v.id,
      impact: v.impact ?? '',
      where: v.nodes.slice(0, 5).map((n) => n.target.join(' ')),
    }));
  });
  return violations.filter((v) => v.impact === 'serious' || v.impact === 'critical');
}

async function startProcess(
  file: string,
  env: Record<string, string>,
): Promise<{ child: ChildProcess; port: number }> {
  const child = spawn(process.execPath, [file], {
    cwd: root,
    env: { PATH: process.env.PATH, NODE_ENV: 'production', ...env },
    stdio: ['ignore', 'pipe', 'inherit'],
  });
  const lines = createInterface({ input: child.stdout! });
  const port = await new Promise<number>((resolve, reject) => {
    child.once('exit', (code) => reject(new Error(`${file} ended with code ${code} before it was ready.`)));
    lines.on('line', (line) => {
      if (!line.includes('"msg":"listening"')) return;
      resolve((JSON.parse(line) as { port?: number }).port ?? 0);
    });
  });
  child.removeAllListeners('exit');
  return { child, port };
}

async function stopProcess(child: ChildProcess): Promise<void> {
  if (child.exitCode !== null) return;
  const ended = new Promise((resolve) => child.once('exit', resolve));
  child.kill('SIGTERM');
  await ended;
}

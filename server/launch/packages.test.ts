import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, describe, expect, test } from 'vitest';
import { checkNodeVersion, whyPackagesAreStale } from './packages.mjs';

let root: string;

const wanted = {
  '': { name: 'whichwire' },
  'node_modules/one': { version: '1.0.0', integrity: 'sha512-one' },
  'node_modules/for-another-system': { version: '1.0.0', integrity: 'sha512-other', optional: true },
};

function writeLock(place: string, packages: Record<string, unknown>) {
  writeFileSync(join(root, place), JSON.stringify({ lockfileVersion: 3, packages }));
}

beforeEach(() => {
  root = mkdtempSync(join(tmpdir(), 'launch-packages-'));
  mkdirSync(join(root, 'node_modules', 'one'), { recursive: true });
  writeFileSync(join(root, 'node_modules', 'one', 'package.json'), '{}');
  writeFileSync(join(root, 'package.json'), JSON.stringify({ engines: { node: '>=20.19' } }));
  writeLock('package-lock.json', wanted);
  writeLock('node_modules/.package-lock.json', {
    'node_modules/one': { version: '1.0.0', integrity: 'sha512-one' },
  });
});

afterEach(() => rmSync(root, { recursive: true, force: true }));

describe('whether npm ci has to run', () => {
  test('packages that match the lock file are left alone, other systems’ optional ones included', () => {
    expect(whyPackagesAreStale(root)).toBeNull();
  });

  test('an installation broken off before npm wrote its own list counts as none', () => {
    rmSync(join(root, 'node_modules', '.package-lock.json'));
    expect(whyPackagesAreStale(root)).toBe('not installed yet');
  });

  test('a package added to the lock file is missed', () => {
    writeLock('package-lock.json', { ...wanted, 'node_modules/two': { version: '2.0.0' } });
    expect(whyPackagesAreStale(root)).toBe('node_modules/two is missing');
  });

  test('another version of a package is noticed', () => {
    writeLock('package-lock.json', {
      ...wanted,
      'node_modules/one': { version: '1.0.1', integrity: 'sha512-one' },
    });
    expect(whyPackagesAreStale(root)).toBe('node_modules/one has another version');
  });

  test('a package dropped from the lock file is noticed', () => {
    writeLock('package-lock.json', { '': wanted[''] });
    expect(whyPackagesAreStale(root)).toBe('node_modules/one is no longer wanted');
  });

  test('a package folder deleted by hand is noticed', () => {
    rmSync(join(root, 'node_modules', 'one'), { recursive: true });
    expect(whyPackagesAreStale(root)).toBe('node_modules/one was removed');
  });
});

describe('the Node version', () => {
  test.each(['20.19.0', '20.20.2', '22.0.0', '24.1.0'])('Node %s is accepted', (version) => {
    expect(checkNodeVersion(root, version)).toBeUndefined();
  });

  test.each(['20.18.9', '18.20.0'])('Node %s is refused with the version that is needed', (version) => {
    expect(() => checkNodeVersion(root, version)).toThrow(
      `Whichwire needs Node 20.19 or newer; this is Node ${version}.`,
    );
  });
});

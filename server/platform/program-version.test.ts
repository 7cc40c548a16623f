import { mkdtempSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import path from 'node:path';
import { pathToFileURL } from 'node:url';
import { expect, test } from 'vitest';
import { readBuildId } from './program-version.ts';

test('a built program is told apart by its fingerprint, one that runs from its sources has none', () => {
  const folder = mkdtempSync(path.join(tmpdir(), 'program-version-'));
  try {
    const note = pathToFileURL(path.join(folder, 'built-server.json'));
    expect(readBuildId(note)).toBeNull();
    writeFileSync(note, JSON.stringify({ fingerprint: '3f2a91c07b5e4d18aa' }));
    expect(readBuildId(note)).toBe('3f2a91c07b5e');
  } finally {
    rmSync(folder, { recursive: true });
  }
});

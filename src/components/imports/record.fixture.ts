import type { ImportRecord } from '../../../shared/contracts/import.ts';

/** An import as the server tells it, for tests. */
export function recordFixture(overrides: Partial<ImportRecord> = {}): ImportRecord {
  return {
    id: 7,
    kind: 'spots',
    fileName: 'night.csv',
    sha256: null,
    sizeBytes: 1000,
    state: 'done',
    mapping: null,
    rowsRead: 100,
    rowsStored: 88,
    rowsDoubled: 5,
    rowsRefused: 4,
    rowsSkipped: 3,
    rowsUndone: 0,
    bytesDone: 1000,
    rowsPerSecond: 5000,
    secondsLeft: null,
    firstAt: '2026-11-30T18:00:00Z',
    lastAt: '2026-12-01T06:30:00Z',
    error: null,
    createdBy: 'Oisin',
    createdAt: '2026-12-01T09:00:00Z',
    finishedAt: '2026-12-01T09:01:00Z',
    jobId: 4,
    sameAsImportId: null,
    ...overrides,
  };
}

import { describe, expect, it } from 'vitest';
import { createReceiverNames } from './receiver-names.ts';

describe('names of receivers', () => {
  const one = createReceiverNames([
    { id: 3, callSign: 'EI7QSA' },
    { id: 4, callSign: 'EI7QSB' },
  ]);

  it.each(['EI7QSA', 'EI7QSA-#', 'ei7qsa-1', 'EI7QSA-1-#', ' EI7QSA-12 '])(
    'finds EI7QSA under %j',
    (name) => {
      expect(one.find(name)).toBe(3);
    },
  );

  it.each(['EI7QSAB', 'EI7QS', 'EI7QSA/P', 'EI7QSA-123', '', '-#'])(
    'does not find anything under %j',
    (name) => {
      expect(one.find(name)).toBeNull();
    },
  );

  it('tells several receivers under one call apart by their numbers', () => {
    const names = createReceiverNames([
      { id: 1, callSign: 'EI7QSB' },
      { id: 2, callSign: 'EI7QSB-2' },
    ]);
    expect(['EI7QSB-#', 'EI7QSB-1-#', 'EI7QSB-2-#'].map(names.find)).toEqual([1, 1, 2]);
  });
});

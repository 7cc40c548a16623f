import type { MethodEntry, MethodGroup } from '../../../shared/methods/method-entry.ts';
import { methodTerms } from '../../../shared/methods/method-ids.ts';

/** Accents, case and the different dashes of typeset text must not hide an entry from whoever types on a keyboard. */
const plain = (text: string) =>
  text
    .normalize('NFKD')
    .replace(/[\u0300-\u036f]/g, '')
    .replace(/[\u2010-\u2015\u2212]/g, '-')
    .replace(/[\u2018\u2019]/g, "'")
    .toLowerCase();

const wordsOf = (entry: MethodEntry) =>
  plain(
    [
      entry.title,
      entry.asks,
      methodTerms[entry.id],
      ...entry.text,
      ...(entry.formula ?? []),
      ...(entry.rules?.rows.flat() ?? []),
      ...entry.sources,
    ].join(' '),
  );

/** The groups with those entries that hold every word looked for; empty groups are left out. */
export function findMethods(groups: readonly MethodGroup[], wanted: string): MethodGroup[] {
  const words = plain(wanted).split(/\s+/).filter(Boolean);
  return groups
    .map((group) => ({
      ...group,
      entries: group.entries.filter((entry) => {
        const text = wordsOf(entry);
        return words.every((word) => text.includes(word));
      }),
    }))
    .filter(({ entries }) => entries.length > 0);
}

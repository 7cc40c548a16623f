/**
 * Receivers of a station by the names that feeds give them. A feed adds marks to a receiver's call sign
 * (`-#` for a skimmer, `-1`, `-2-#` for one of several): common practice of the trade, no standard.
 */
export interface ReceiverNames {
  /** The receiver's id, or null when it is not one of the station's. */
  find(name: string): number | null;
}

/** "ei7qsb-2-#" -> "EI7QSB-2": what several receivers under one call are told apart by stays. */
function withoutSkimmerMark(name: string): string {
  return name.trim().toUpperCase().replace(/-#$/, '');
}

/** "EI7QSB-2-#" -> "EI7QSB". */
function withoutMarks(name: string): string {
  return withoutSkimmerMark(name).replace(/-\d{1,2}$/, '');
}

export function createReceiverNames(receivers: readonly { id: number; callSign: string }[]): ReceiverNames {
  const byName = new Map<string, number>();
  for (const { id, callSign } of receivers) byName.set(withoutSkimmerMark(callSign), id);
  return {
    // The exact name first: a station may have EI7QSB-1 and EI7QSB-2, and another just EI7QSB.
    find: (name) => byName.get(withoutSkimmerMark(name)) ?? byName.get(withoutMarks(name)) ?? null,
  };
}

/** Keeps a number and its unit on one line, a narrow space between. */
export function keepUnits(text: string): string {
  return text
    .replaceAll('\u2009', '\u202f')
    .replace(/(?<=[\d\u00b1]) (?=(?:dB|%|km|kHz|min|s|h|m)(?![\p{L}\d]))/gu, '\u202f');
}

/** Whether a cell is a number, with or without its unit. */
export function isNumeric(text: string): boolean {
  return /^[+\u2212]?[\d.\u2009]+(?:\u2009(?:dB|%|h|km)| h|\u00b0)?$/.test(text);
}

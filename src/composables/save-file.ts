/** Hands a file to the browser's own saving. */
export function saveBlob(blob: Blob, fileName: string): void {
  const url = URL.createObjectURL(blob);
  const link = document.createElement('a');
  link.href = url;
  link.download = fileName;
  link.click();
  // Revoking at once would cancel the download in some browsers.
  setTimeout(() => URL.revokeObjectURL(url), 10_000);
}

export type Cell = string | number | null | undefined;

/**
 * RFC 4180 text with CRLF ends. A text cell that a spreadsheet would run as a formula is led by an apostrophe;
 * numbers, negative ones too, stay numbers.
 */
export function toCsv(header: readonly string[], rows: readonly (readonly Cell[])[]): string {
  return [header, ...rows].map((row) => row.map(csvCell).join(',')).join('\r\n') + '\r\n';
}

function csvCell(cell: Cell): string {
  if (cell === null || cell === undefined) return '';
  if (typeof cell === 'number') return Number.isFinite(cell) ? String(cell) : '';
  const safe = /^[=+\-@\t\r]/.test(cell) ? `'${cell}` : cell;
  return /[",\r\n]/.test(safe) ? `"${safe.replaceAll('"', '""')}"` : safe;
}

export function saveCsv(
  fileName: string,
  header: readonly string[],
  rows: readonly (readonly Cell[])[],
): void {
  saveBlob(new Blob([toCsv(header, rows)], { type: 'text/csv;charset=utf-8' }), fileName);
}

/**
 * CSV (RFC 4180) that a spreadsheet does not run: a cell that starts like a formula gets an apostrophe in
 * front (OWASP, CSV injection). Numbers keep their minus sign.
 */
export function csvCell(value: string | number | null | undefined): string {
  if (value === null || value === undefined) return '';
  if (typeof value === 'number') return Number.isFinite(value) ? String(value) : '';
  const safe = /^[=+\-@\t\r]/.test(value) ? `'${value}` : value;
  return /[",\r\n]/.test(safe) || safe !== safe.trim() ? `"${safe.replaceAll('"', '""')}"` : safe;
}

export function csvLine(cells: (string | number | null | undefined)[]): string {
  return `${cells.map(csvCell).join(',')}\r\n`;
}

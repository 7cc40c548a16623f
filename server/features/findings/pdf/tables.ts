import type { Fact } from './facts.ts';
import { ink } from './sheet.ts';
import type { Sheet, TextStyle } from './sheet.ts';

const what: TextStyle = { size: 9, colour: ink.muted };
const value: TextStyle = { size: 9 };
const gap = 24;

function rowHeight(sheet: Sheet, fact: Fact, whatWidth: number, valueWidth: number): number {
  return Math.max(sheet.heightOf(fact[0], whatWidth, what), sheet.heightOf(fact[1], valueWidth, value)) + 4;
}

function drawRow(
  sheet: Sheet,
  [term, text]: Fact,
  place: { x: number; y: number; width: number; whatWidth: number; height: number },
  align: 'left' | 'right',
): void {
  const { x, y, width, whatWidth, height } = place;
  sheet.write(term, { ...what, x, y: y + 1, width: whatWidth });
  sheet.write(text, { ...value, x: x + whatWidth + 8, y: y + 1, width: width - whatWidth - 8, align });
  sheet.doc
    .moveTo(x, y + height - 1)
    .lineTo(x + width, y + height - 1)
    .lineWidth(0.4)
    .stroke(ink.line);
}

/** Lines "what ... how much" over the whole width; a row stays whole, and the last one has company. */
export function drawFacts(sheet: Sheet, facts: readonly Fact[], whatShare = 0.3): void {
  const whatWidth = sheet.width * whatShare;
  const heights = facts.map((fact) => rowHeight(sheet, fact, whatWidth, sheet.width - whatWidth - 8));
  for (const [index, fact] of facts.entries()) {
    const height = heights[index]!;
    // The last row does not stand on the next page alone.
    sheet.keep(index === facts.length - 2 ? height + heights[index + 1]! : height);
    drawRow(sheet, fact, { x: sheet.left, y: sheet.y, width: sheet.width, whatWidth, height }, 'left');
    sheet.y += height;
  }
  sheet.space(4);
}

export interface Column {
  title: string;
  facts: readonly Fact[];
}

/** Two small tables side by side, each under its title; both stay on one page. */
export function drawColumns(sheet: Sheet, columns: readonly [Column, Column]): void {
  const width = (sheet.width - gap) / 2;
  const whatWidth = width * 0.62;
  const heights = columns.map(({ facts }) =>
    facts.map((fact) => rowHeight(sheet, fact, whatWidth, width - whatWidth - 8)),
  );
  const tallest = columnsHeight(sheet, columns);
  sheet.keep(tallest);
  columns.forEach(({ title, facts }, side) => {
    const x = sheet.left + side * (width + gap);
    let y = sheet.y;
    y += sheet.write(title, { x, y, width, size: 10, weight: 600 }) + 2;
    facts.forEach((fact, index) => {
      const height = heights[side]![index]!;
      drawRow(sheet, fact, { x, y, width, whatWidth, height }, 'right');
      y += height;
    });
  });
  sheet.y += tallest;
  sheet.space(8);
}

export function columnsHeight(sheet: Sheet, columns: readonly [Column, Column]): number {
  const width = (sheet.width - gap) / 2;
  const whatWidth = width * 0.62;
  return Math.max(
    ...columns.map(
      ({ title, facts }) =>
        sheet.heightOf(title, width, { size: 10, weight: 600 }) +
        2 +
        facts.reduce((sum, fact) => sum + rowHeight(sheet, fact, whatWidth, width - whatWidth - 8), 0),
    ),
  );
}

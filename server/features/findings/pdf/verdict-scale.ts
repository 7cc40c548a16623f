import type { ComparisonAnswer } from '../../../../shared/contracts/comparison.ts';
import { formatDb, formatDbInterval, formatLevel, formatSigned } from '../../../../shared/format.ts';
import { differenceScale, placeOnScale, scaleTicks } from '../../../../shared/pictures/difference-scale.ts';
import { ink } from './sheet.ts';
import type { Sheet } from './sheet.ts';

const barHeight = 26;
/** Below the names: bar, ticks and the words under them. */
const belowNames = 66;

/** The answer on a dB scale: the margin shaded, zero marked, the interval as a bar, the estimate as a dot. */
export function drawVerdictScale(sheet: Sheet, answer: ComparisonAnswer): void {
  const { doc, left, width } = sheet;
  const scale = differenceScale(answer);
  const inset = 14;
  const at = (db: number) => left + inset + placeOnScale(db, scale.limitDb, width - 2 * inset);
  const { a, b } = answer.antennas;
  const names = { b: `\u2190 ${b.name} hears better`, a: `${a.name} hears better \u2192` };
  const style = { width: width / 2 - 6, size: 9.5, weight: 600 as const };
  const namesHeight = Math.max(
    sheet.heightOf(names.a, style.width, style),
    sheet.heightOf(names.b, style.width, style),
  );
  sheet.keep(namesHeight + belowNames);
  const { y } = sheet;
  sheet.write(names.b, { ...style, x: left, y, colour: ink.b });
  sheet.write(names.a, { ...style, x: left + width / 2 + 6, y, colour: ink.a, align: 'right' });

  const bar = y + namesHeight + 5;
  doc.rect(at(-answer.marginDb), bar, at(answer.marginDb) - at(-answer.marginDb), barHeight);
  doc.fillOpacity(0.22).fill(ink.edge).fillOpacity(1);
  const floor = bar + barHeight;
  doc.moveTo(at(-scale.limitDb), floor).lineTo(at(scale.limitDb), floor).lineWidth(0.75).stroke(ink.edge);
  for (const tick of scaleTicks(scale)) {
    doc
      .moveTo(at(tick), floor)
      .lineTo(at(tick), floor + 4)
      .lineWidth(0.75)
      .stroke(ink.edge);
    sheet.write(formatSigned(tick, Number.isInteger(scale.stepDb) ? 0 : 1), {
      x: at(tick) - 20,
      y: floor + 5,
      width: 40,
      size: 8.5,
      colour: ink.muted,
      align: 'center',
    });
  }
  doc
    .moveTo(at(0), bar - 2)
    .lineTo(at(0), floor)
    .lineWidth(1.25)
    .stroke(ink.text);

  const { estimate, marginDb } = answer;
  const margin = `Shaded: the margin of ${formatLevel(marginDb, 1)} either way.`;
  if (estimate) {
    const middle = bar + barHeight / 2;
    const [low, high] = estimate.interval95Db;
    const colour = estimate.estimateDb >= 0 ? ink.a : ink.b;
    doc.moveTo(at(low), middle).lineTo(at(high), middle).lineWidth(5).lineCap('butt').stroke(colour);
    doc.circle(at(estimate.estimateDb), middle, 7).lineWidth(1.25).fillAndStroke(colour, '#ffffff');
  }
  const words = estimate
    ? `${formatDb(estimate.estimateDb)}, 95\u2009% interval ${formatDbInterval(estimate.interval95Db)}. ${margin}`
    : `No estimate. ${margin}`;
  sheet.write(words, { x: left, y: floor + 20, width, size: 9, colour: ink.muted });
  sheet.y = bar + belowNames;
}

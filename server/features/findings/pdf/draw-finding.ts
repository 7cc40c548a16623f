import type { Paper } from '../../../../shared/contracts/finding.ts';
import { dateText } from '../../../../shared/contracts/comparison-sentence.ts';
import { formatCount, formatUtc, formatUtcDay } from '../../../../shared/format.ts';
import type { FrozenPictures } from '../pictures.ts';
import * as facts from './facts.ts';
import type { PrintedFinding } from './facts.ts';
import { headingHeight, ink, Sheet } from './sheet.ts';
import { columnsHeight, drawColumns, drawFacts } from './tables.ts';
import type { Column } from './tables.ts';
import { drawVerdictScale } from './verdict-scale.ts';

export interface PdfInput {
  finding: PrintedFinding;
  pictures: FrozenPictures;
  paper: Paper;
}

/** A finding on A4 or Letter: real text in embedded fonts, pictures as vectors. Pure; the same input, the same pages. */
export async function drawFinding({ finding, pictures, paper }: PdfInput): Promise<Uint8Array> {
  const sheet = new Sheet({
    paper,
    title: finding.title,
    author: finding.frozenBy,
    subject: finding.sentence,
    made: new Date(finding.frozenAt),
  });
  drawHead(sheet, finding);
  drawVerdict(sheet, finding);
  drawDecisions(sheet, finding);
  drawPair(sheet, pictures);
  drawWide(sheet, 'When', pictures['band-hour'].sheets, captions['band-hour']);
  const steady = () => drawWide(sheet, 'How steady', pictures.forest.sheets, captions.forest);
  // A tall picture by night would leave half a page empty: where the checks fill it, the picture follows them.
  const picture = wideLayout(sheet, pictures.forest.sheets[0]!, captions.forest).whole;
  const checksFirst = picture > sheet.room && fairnessHeight(sheet, finding) <= sheet.room;
  if (!checksFirst) steady();
  drawFairness(sheet, finding);
  if (checksFirst) steady();
  drawOtherViews(sheet, finding);
  drawOffsets(sheet, finding);
  drawRecord(sheet, finding);
  drawHowToRead(sheet, finding);
  const { station, title, frozenAt, digest } = finding;
  const foot = `${station.callSign}   frozen ${formatUtcDay(frozenAt)}   ${digest.slice(0, 16)}   ${title}`;
  return sheet.finish((page, pages) => [foot, `page ${page} of ${pages}`]);
}

function drawHead(sheet: Sheet, finding: PrintedFinding): void {
  const { station } = finding;
  drawMark(sheet);
  sheet.write(`${station.name}   ${station.callSign}   ${station.locator}`, {
    x: sheet.left + 26,
    y: sheet.y + 2,
    width: sheet.width - 26,
    size: 10,
    weight: 600,
    colour: ink.muted,
  });
  sheet.y += 26;
  sheet.paragraph(finding.title, { size: 20, weight: 600, after: 3 });
  sheet.paragraph(finding.sentence, { size: 11.5, colour: ink.muted, after: 10 });
  sheet.rule();
  sheet.y += 10;
}

/** The three level strokes, the middle one lit. */
function drawMark(sheet: Sheet): void {
  const { doc, left, y } = sheet;
  for (const [row, colour] of [ink.edge, ink.accent, ink.edge].entries()) {
    doc
      .moveTo(left, y + 4 + row * 5)
      .lineTo(left + 18, y + 4 + row * 5)
      .lineWidth(row === 1 ? 2.5 : 1.75)
      .lineCap('round')
      .stroke(colour);
  }
  doc.lineCap('butt');
}

function drawVerdict(sheet: Sheet, finding: PrintedFinding): void {
  const answer = facts.answerOf(finding);
  sheet.paragraph(answer.verdict.sentence, { size: 16, weight: 600, after: 12 });
  for (const cure of answer.verdict.cures) sheet.paragraph(cure, { size: 10, after: 3 });
  if (answer.verdict.cures.length > 0) sheet.space(6);
  drawVerdictScale(sheet, answer);
  const { units, stations, nights } = answer.counts;
  const small: [string, number][] = [
    [units === 1 ? 'unit' : 'units', units],
    [stations === 1 ? 'station' : 'stations', stations],
    [nights === 1 ? 'night' : 'nights', nights],
  ];
  sheet.keep(34);
  small.forEach(([word, count], index) => {
    const x = sheet.left + index * (sheet.width / 3);
    const number = formatCount(count);
    sheet.write(number, { x, y: sheet.y, width: sheet.width / 3, size: 18, weight: 600 });
    const after = x + sheet.widthOf(number, 18, 600) + 5;
    sheet.write(word, { x: after, y: sheet.y + 8, width: 80, size: 10, colour: ink.muted });
  });
  sheet.y += 32;
  if (finding.note !== '') sheet.paragraph(finding.note, { size: 10, after: 8 });
}

function drawDecisions(sheet: Sheet, finding: PrintedFinding): void {
  const { decisions } = finding;
  if (decisions.length === 0) return;
  sheet.heading(decisions.length === 1 ? 'Decision' : 'Decisions', 40);
  if (decisions.length > 1) sheet.paragraph('The last one counts.', { size: 9, colour: ink.muted, after: 3 });
  for (const each of [...decisions].reverse()) {
    const about = each.antennaName ?? 'The finding as a whole';
    const on = each.lookAgainOn ? ` on ${dateText(each.lookAgainOn)}` : '';
    const line = `${about}: ${each.decision}${on}`;
    const by = `${each.decidedBy}, ${formatUtc(each.decidedAt)}`;
    // What was decided, by whom and the first lines of why stay together.
    sheet.keep(52);
    sheet.paragraph(line, { size: 11, weight: 600, after: 0 });
    sheet.paragraph(by, { size: 9, colour: ink.muted, after: 1 });
    sheet.paragraph(each.reason, { size: 10, after: 7 });
  }
}

const captions = {
  histogram: 'Units by their difference, with the estimate and its 95\u2009% interval; the margin is shaded.',
  rose: 'The difference toward each sector, north on top. Hatched: not enough evidence.',
  'band-hour': 'The difference by band and hour. Hatched: not enough evidence.',
  forest:
    'One line a night with its 95\u2009% interval; larger dots carry more units. Hollow and dashed: fewer than 8 stations.',
};
const captionStyle = { size: 8.5, colour: ink.muted };
const titleHeight = 20;
const wideGap = 14;
/** Numbers in the pictures must stay readable on paper. */
const smallestScale = 0.8;

function drawPair(sheet: Sheet, pictures: FrozenPictures): void {
  const gap = 14;
  const half = (sheet.width - gap) / 2;
  const pair = [
    { title: 'The differences', name: 'histogram', x: sheet.left },
    { title: 'Where', name: 'rose', x: sheet.left + half + gap },
  ] as const;
  const captionHeight = Math.max(
    ...pair.map(({ name }) => sheet.heightOf(captions[name], half, captionStyle)),
  );
  const fullHeight = Math.max(...pair.map(({ name }) => sheet.pictureHeight(pictures[name].whole, half)));
  sheet.space(10);
  // A little smaller on this page rather than on the next one, with half of this one empty.
  const shrunk = (sheet.room - titleHeight - 4 - captionHeight) / fullHeight;
  const scale = shrunk < 1 && shrunk >= smallestScale ? shrunk : 1;
  const height = fullHeight * scale;
  const whole = titleHeight + height + 4 + captionHeight;
  sheet.keep(whole);
  sheet.doc.outline.addItem('The pictures');
  const top = sheet.y;
  for (const { title, name, x } of pair) {
    sheet.write(title, { x, y: top, width: half, size: 12, weight: 600 });
    sheet.y = top + titleHeight;
    const width = half * scale;
    sheet.picture(pictures[name].whole, { x: x + (half - width) / 2, width });
    const below = top + titleHeight + height + 4;
    sheet.write(captions[name], { x, y: below, width: half, ...captionStyle });
  }
  sheet.y = top + whole;
}

/** How large a picture over both columns is drawn, and what it takes with heading and caption, in points. */
function wideLayout(sheet: Sheet, svg: string, caption: string) {
  const around = wideGap + titleHeight + 4 + sheet.heightOf(caption, sheet.width, captionStyle);
  // A picture that is taller than a page is drawn smaller, never cut.
  const most = sheet.pageRoom - around;
  const width = Math.min(sheet.width, (sheet.width * most) / sheet.pictureHeight(svg, sheet.width));
  const height = sheet.pictureHeight(svg, width);
  return { width, height, whole: around + height };
}

/** A picture over both columns; heading, first sheet and caption stay together. */
function drawWide(sheet: Sheet, title: string, sheets: readonly string[], caption: string): void {
  sheets.forEach((svg, index) => {
    const { width, height, whole } = wideLayout(sheet, svg, caption);
    if (whole > sheet.room) sheet.keep(sheet.pageRoom);
    sheet.space(wideGap);
    const heading = sheets.length === 1 ? title : `${title} (${index + 1} of ${sheets.length})`;
    sheet.write(heading, { x: sheet.left, y: sheet.y, width: sheet.width, size: 12, weight: 600 });
    sheet.y += titleHeight;
    sheet.picture(svg, { x: sheet.left + (sheet.width - width) / 2, width });
    sheet.y += height + 4;
    sheet.y += sheet.write(caption, { x: sheet.left, y: sheet.y, width: sheet.width, ...captionStyle });
  });
}

function fairnessColumns(finding: PrintedFinding): [Column, Column] {
  const answer = facts.answerOf(finding);
  return [
    { title: 'Left out', facts: facts.leftOutFacts(answer) },
    { title: 'What carries it', facts: facts.evidenceFacts(answer) },
  ];
}
const sentenceStyle = { size: 9.5, after: 3 };

function fairnessHeight(sheet: Sheet, finding: PrintedFinding): number {
  const sentences = facts.fairnessSentences(facts.answerOf(finding));
  return sentences.reduce(
    (sum, sentence) => sum + sheet.heightOf(sentence, sheet.width, sentenceStyle) + sentenceStyle.after,
    headingHeight + columnsHeight(sheet, fairnessColumns(finding)) + 8,
  );
}

function drawFairness(sheet: Sheet, finding: PrintedFinding): void {
  const columns = fairnessColumns(finding);
  sheet.heading('Is it fair', columnsHeight(sheet, columns));
  drawColumns(sheet, columns);
  for (const sentence of facts.fairnessSentences(facts.answerOf(finding)))
    sheet.paragraph(sentence, sentenceStyle);
}

function drawOtherViews(sheet: Sheet, finding: PrintedFinding): void {
  const others = facts.otherViewFacts(facts.answerOf(finding));
  if (others.length === 0) return;
  sheet.heading('The same, seen otherwise', 40);
  drawFacts(sheet, others, 0.5);
}

function drawOffsets(sheet: Sheet, finding: PrintedFinding): void {
  const offsets = facts.offsetFacts(finding);
  const { separable } = facts.answerOf(finding).fairness;
  sheet.heading('Receivers', 40);
  const words = !separable
    ? 'The differences between the receivers cannot be told from those between the antennas.'
    : offsets.length === 0
      ? 'No difference between receivers had to be taken out.'
      : 'How much more a receiver reports than another on the same antenna. These differences are taken out of every number above.';
  sheet.paragraph(words, { size: 9.5, colour: ink.muted, after: 3 });
  drawFacts(sheet, offsets, 0.5);
}

function drawRecord(sheet: Sheet, finding: PrintedFinding): void {
  sheet.heading('Rules', 60);
  drawFacts(sheet, facts.ruleFacts(finding));
  sheet.heading('Record', 60);
  drawFacts(sheet, facts.recordFacts(finding));
}

function drawHowToRead(sheet: Sheet, finding: PrintedFinding): void {
  sheet.heading('How to read this', 40);
  for (const text of facts.howToRead(facts.answerOf(finding))) sheet.paragraph(text, { size: 9.5, after: 5 });
}

import type { DwellPreview } from '../../../shared/contracts/dwell.ts';
import { countOf } from '../../../shared/format.ts';

/** What a correction would change, a line each; a line that would say "0" is left out. */
export function previewLines(preview: DwellPreview): string[] {
  const { spotsGainingAntenna: gaining, spotsLosingAntenna: losing, spotsChangingGuard: guard } = preview;
  const moving = preview.spotsChangingAntenna - gaining - losing;
  const spots = (count: number, one: string, many: string) =>
    count === 0 ? [] : [`${countOf(count, 'spot')} ${count === 1 ? one : many}`];
  const lines = [
    ...spots(moving, 'changes antenna', 'change antenna'),
    ...spots(gaining, 'that had none gains an antenna', 'that had none gain an antenna'),
    ...spots(losing, 'loses its antenna', 'lose their antenna'),
    ...spots(guard, 'moves into or out of a guard', 'move into or out of a guard'),
  ];
  if (lines.length === 0) lines.push('No spot changes antenna or guard');
  if (preview.blocksTouched > 0) lines.push(`${countOf(preview.blocksTouched, 'block')} touched`);
  if (preview.nightsTouched.length > 0) lines.push(nightsLine(preview.nightsTouched));
  return lines;
}

function nightsLine(nights: readonly string[]): string {
  const made = `${countOf(nights.length, 'night')} made anew`;
  if (nights.length <= 3) return `${made}: ${nights.join(', ')}`;
  return `${made}, from ${nights[0]} to ${nights.at(-1)}`;
}

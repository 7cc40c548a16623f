import { writeFileSync } from 'node:fs';
import { join } from 'node:path';
import { selectHeardOnly } from '../../../shared/comparison/heard-only-selection.ts';
import { selectUnits } from '../../../shared/comparison/selection.ts';
import { askSample } from './ask.ts';

/**
 * Writes the units and heard-only rows of ALPHA against BRAVO for views.R to work on, which holds what is
 * computed from them against R. The rows themselves are held against an independent working elsewhere.
 * By hand: npx tsx tests/reference/sample-station/write-rows.ts <folder>
 */
const folder = process.argv[2];
if (folder === undefined) throw new Error('Name the folder to write to.');
for (const set of ['swap', 'alternate'] as const) {
  const input = askSample(set, 'ALPHA', 'BRAVO');
  const receiver = new Map(input.receivers.map(({ id, callSign }) => [id, callSign]));
  const call = (id: number) => input.calls.get(id)!.call;
  const units = selectUnits(input).units;
  const heard = selectHeardOnly(input);
  const unitLines = Array.from(units.call, (id, i) =>
    [
      ...[call(id), units.band[i], units.night[i], units.blockMinute[i], units.alternating[i]],
      ...[receiver.get(units.receiverA[i]!), receiver.get(units.receiverB[i]!), units.differenceDb[i]],
    ].join(','),
  );
  const heardLines = Array.from(heard.call, (id, i) =>
    [
      ...[call(id), heard.band[i], heard.night[i], heard.side[i]],
      ...[receiver.get(heard.receiverA[i]!), receiver.get(heard.receiverB[i]!), heard.heardDb[i]],
    ].join(','),
  );
  const write = (name: string, header: string, lines: string[]) =>
    writeFileSync(join(folder, `${set}-${name}.csv`), [header, ...lines, ''].join('\n'));
  write('units', 'call,band,night,block,alternating,rxA,rxB,d', unitLines);
  write('heard', 'call,band,night,side,rxA,rxB,snr', heardLines);
}

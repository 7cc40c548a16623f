import { z } from 'zod';
import { callSignText, endpoint, id, locatorText, numberWithin, shortText, stationParams } from './common.ts';

export const blockMinutesChoices = [5, 10, 15, 20, 30, 60];
export const sectorCountChoices = [4, 6, 8, 12, 16, 18, 24, 36];
const oneOf = (choices: number[]) =>
  z.union(
    choices.map((n) => z.literal(n)),
    `Choose one of ${choices.join(', ')}.`,
  );
export const blockMinutes = oneOf(blockMinutesChoices);

export const station = z.object({
  id,
  name: z.string(),
  callSign: z.string(),
  locator: z.string(),
  latitudeDeg: z.number(),
  longitudeDeg: z.number(),
  timeZone: z.string(),
  ituRegion: z.number().int(),
  guardSeconds: z.number().int(),
  blockMinutes: z.number().int(),
  windowSeconds: z.number().int(),
  freqToleranceKhz: z.number(),
  marginDb: z.number(),
  sectorCount: z.number().int(),
  isDemo: z.boolean(),
});
export type Station = z.infer<typeof station>;

export const readStation = endpoint({
  method: 'GET',
  path: '/stations/:stationId',
  summary: 'Position and standing rules of a station',
  params: stationParams,
  reply: station,
});
export const updateStation = endpoint({
  method: 'PATCH',
  path: '/stations/:stationId',
  summary: 'Change position or standing rules; units are made anew where they depend on it',
  params: stationParams,
  body: z.object({
    name: shortText(80).optional(),
    callSign: callSignText.optional(),
    locator: locatorText.optional(),
    timeZone: shortText(60).optional(),
    ituRegion: numberWithin(1, 3).int('Give 1, 2 or 3.').optional(),
    guardSeconds: numberWithin(0, 600).int('Give whole seconds.').optional(),
    blockMinutes: blockMinutes.optional(),
    windowSeconds: numberWithin(1, 300).int('Give whole seconds.').optional(),
    freqToleranceKhz: numberWithin(0, 5).multipleOf(0.1, 'Give a multiple of 0.1.').optional(),
    marginDb: numberWithin(0.1, 20).optional(),
    sectorCount: oneOf(sectorCountChoices).optional(),
  }),
  reply: station,
});

import { z } from 'zod';
import { endpoint, id, instant, stationParams } from './common.ts';
import { verdictCode } from './comparison.ts';

/** A station that two receivers on two antennas heard at the same moment. Positive: A was stronger. */
export const livePair = z.object({
  at: instant,
  call: z.string(),
  country: z.string().nullable(),
  bandMetres: z.number().int(),
  azimuthDeg: z.number().nullable(),
  sector: z.number().int().nullable(),
  antennaA: id,
  antennaB: id,
  receiverA: id,
  receiverB: id,
  snrADb: z.number(),
  snrBDb: z.number(),
  differenceDb: z.number(),
});
export type LivePair = z.infer<typeof livePair>;

export const tonightAnswer = z.object({
  at: instant,
  night: z.iso.date(),
  sun: z.object({
    sunset: instant.nullable(),
    sunrise: instant.nullable(),
    altitudeDeg: z.number(),
    /** Until the sunrise of this night; null in daylight or polar night. */
    darknessLeftMinutes: z.number().int().nullable(),
    minutesToSunset: z.number().int().nullable(),
  }),
  receivers: z.array(
    z.object({
      receiverId: id,
      callSign: z.string(),
      label: z.string(),
      antennaId: id.nullable(),
      antennaName: z.string().nullable(),
      antennaMarker: z.string().nullable(),
      since: instant.nullable(),
      spotsLastTenMinutes: z.number().int(),
    }),
  ),
  /** By day nobody can say much of the low bands at this hour: the advice is then for the evening to come. */
  about: z.enum(['this hour', 'the first two hours after sunset']),
  /** For each band heard lately: the antenna that hears best at this hour against the one in use. */
  bands: z.array(
    z.object({
      bandMetres: z.number().int(),
      inUseAntennaId: id.nullable(),
      sentence: z.string(),
      bestAntennaId: id.nullable(),
      advantageDb: z.number().nullable(),
      intervalDb: z.tuple([z.number(), z.number()]).nullable(),
      code: verdictCode.nullable(),
      units: z.number().int(),
      nights: z.number().int(),
    }),
  ),
  pairs: z.array(livePair),
});
export type TonightAnswer = z.infer<typeof tonightAnswer>;

export const readTonight = endpoint({
  method: 'GET',
  path: '/stations/:stationId/tonight',
  summary: 'What each receiver is on, the sun, the bands of this hour and the last paired stations',
  params: stationParams,
  query: z.object({ inUse: id.optional() }),
  reply: tonightAnswer,
});

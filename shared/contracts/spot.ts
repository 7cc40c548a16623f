import { z } from 'zod';
import { endpoint, id, instant, page, stationParams } from './common.ts';

export const spotTag = z.enum(['tagged', 'guarded', 'untagged']);
export const spotMode = z.enum(['CW', 'RTTY', 'PSK', 'FT8', 'FT4', 'SSB', 'other']);

export const spotRow = z.object({
  heardAt: instant,
  receiverId: id,
  call: z.string(),
  bandMetres: z.number().int(),
  freqKhz: z.number(),
  mode: spotMode,
  snrDb: z.number().int(),
  speedWpm: z.number().int().nullable(),
  uncertaintySeconds: z.number().int(),
  importId: id.nullable(),
  country: z.string().nullable(),
  azimuthDeg: z.number().nullable(),
  distanceKm: z.number().nullable(),
  bearingUnsure: z.boolean(),
  tag: spotTag,
  antennaId: id.nullable(),
  /** A sentence that says why: "9 s after the switch to Vertical; the guard is 20 s." */
  why: z.string(),
});
export type SpotRow = z.infer<typeof spotRow>;

/**
 * Antenna and tag are not stored but derived, so a filter on them has to look at spots that it then leaves
 * out. The server looks for about a second: a page may hold fewer rows than asked for, even none, and still
 * have a `next`. Only `next: null` means that there are no more.
 */
export const listSpots = endpoint({
  method: 'GET',
  path: '/stations/:stationId/spots',
  summary: 'Spots with their tags, newest first, filtered by the server',
  params: stationParams,
  query: z.object({
    from: instant.optional(),
    to: instant.optional(),
    bandMetres: z.coerce.number().int().optional(),
    receiverId: id.optional(),
    antennaId: id.optional(),
    call: z.string().trim().toUpperCase().max(20).optional(),
    tag: spotTag.optional(),
    after: z.string().max(200).optional(),
    limit: z.coerce.number().int().min(1).max(500).default(100),
  }),
  reply: page(spotRow),
});
export const countSpots = endpoint({
  method: 'GET',
  path: '/stations/:stationId/spots/summary',
  summary: 'Spots a night, for the calendar',
  params: stationParams,
  reply: z.object({
    nights: z.array(z.object({ night: z.iso.date(), spots: z.number().int() })),
    total: z.number().int(),
    firstAt: instant.nullable(),
    lastAt: instant.nullable(),
  }),
});
/** For the great-circle map: one dot a station heard in the range. */
export const mapSpots = endpoint({
  method: 'GET',
  path: '/stations/:stationId/spots/map',
  summary: 'Stations heard in a stretch of time, with their bearing',
  params: stationParams,
  query: z.object({ from: instant, to: instant, bandMetres: z.coerce.number().int().optional() }),
  reply: z.object({
    stations: z.array(
      z.object({
        call: z.string(),
        country: z.string().nullable(),
        latitudeDeg: z.number(),
        longitudeDeg: z.number(),
        azimuthDeg: z.number(),
        distanceKm: z.number(),
        spots: z.number().int(),
        bestSnrDb: z.number().int(),
      }),
    ),
  }),
});

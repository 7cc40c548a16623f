import { z } from 'zod';
import { day, endpoint, id, longText, shortText, stationParams } from './common.ts';

export const antennaKind = z.enum(['long wire', 'loop', 'vertical', 'phased pair', 'dipole', 'other']);
/** Marker: a letter and a shape, told apart before any colour is. */
export const antennaMarker = z.string().regex(/^[A-Z]$/, 'Give one letter, A to Z.');
export const antenna = z.object({
  id,
  name: z.string(),
  marker: z.string(),
  kind: antennaKind,
  headingDeg: z.number().nullable(),
  beamwidthDeg: z.number().nullable(),
  lengthM: z.number().nullable(),
  heightM: z.number().nullable(),
  notes: z.string(),
  inServiceFrom: day.nullable(),
  inServiceTo: day.nullable(),
});
export type Antenna = z.infer<typeof antenna>;
const antennaFields = z.object({
  name: shortText(40),
  marker: antennaMarker,
  kind: antennaKind,
  headingDeg: z
    .number('Give degrees clockwise from true north.')
    .min(0, 'Give 0 or more degrees.')
    .lt(360, 'Give less than 360 degrees; north is 0.')
    .nullable(),
  beamwidthDeg: z
    .number('Give degrees.')
    .gt(0, 'Give more than 0 degrees.')
    .max(360, 'Give at most 360 degrees.')
    .nullable(),
  lengthM: z
    .number('Give a length.')
    .gt(0, 'Give more than 0.')
    .max(2000, 'Give at most 2000 metres.')
    .nullable(),
  heightM: z
    .number('Give a height.')
    .min(0, 'Give 0 or more.')
    .max(300, 'Give at most 300 metres.')
    .nullable(),
  notes: longText,
  inServiceFrom: day.nullable(),
  inServiceTo: day.nullable(),
});
const antennaParams = stationParams.extend({ antennaId: id });
export const listAntennas = endpoint({
  method: 'GET',
  path: '/stations/:stationId/antennas',
  summary: 'Antennas of the station, taken-down ones too',
  params: stationParams,
  reply: z.object({ items: z.array(antenna) }),
});
export const addAntenna = endpoint({
  method: 'POST',
  path: '/stations/:stationId/antennas',
  summary: 'Add an antenna',
  params: stationParams,
  body: antennaFields.extend({
    headingDeg: antennaFields.shape.headingDeg.default(null),
    beamwidthDeg: antennaFields.shape.beamwidthDeg.default(null),
    lengthM: antennaFields.shape.lengthM.default(null),
    heightM: antennaFields.shape.heightM.default(null),
    notes: longText.default(''),
    inServiceFrom: antennaFields.shape.inServiceFrom.default(null),
    inServiceTo: antennaFields.shape.inServiceTo.default(null),
  }),
  reply: antenna,
  status: 201,
});
export const updateAntenna = endpoint({
  method: 'PATCH',
  path: '/stations/:stationId/antennas/:antennaId',
  summary: 'Change what is known of an antenna',
  params: antennaParams,
  body: antennaFields.partial(),
  reply: antenna,
});
export const removeAntenna = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/antennas/:antennaId',
  summary: 'Remove an antenna that no dwell names; one with dwells is taken out of service instead',
  params: antennaParams,
  status: 204,
});

import { z } from 'zod';
import {
  callSignText,
  day,
  endpoint,
  id,
  instant,
  longText,
  shortText,
  stationParams,
  uuid,
} from './common.ts';
import { role, tokenScope } from './permission.ts';

export const blockMinutesChoices = [5, 10, 15, 20, 30, 60];
export const sectorCountChoices = [4, 6, 8, 12, 16, 18, 24, 36];
const oneOf = (choices: number[]) =>
  z.union(
    choices.map((n) => z.literal(n)),
    `Choose one of ${choices.join(', ')}.`,
  );
export const blockMinutes = oneOf(blockMinutesChoices);
export const locatorText = z
  .string()
  .trim()
  .regex(/^[A-R]{2}([0-9]{2}([A-X]{2}([0-9]{2})?)?)?$/i, 'Give a Maidenhead locator such as IO53 or IO53kr.');

/** A number in a range, with one sentence for every way to miss it. */
const numberWithin = (from: number, to: number) => {
  const sentence = `Give a number from ${from} to ${to}.`;
  return z.number(sentence).min(from, sentence).max(to, sentence);
};

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

export const receiver = z.object({
  id,
  callSign: z.string(),
  label: z.string(),
  notes: z.string(),
  retiredAt: instant.nullable(),
});
export type Receiver = z.infer<typeof receiver>;
/** Without defaults: a default in a change would overwrite what the change does not name. */
const receiverFields = z.object({ callSign: callSignText, label: shortText(40), notes: longText });
const receiverParams = stationParams.extend({ receiverId: id });
export const listReceivers = endpoint({
  method: 'GET',
  path: '/stations/:stationId/receivers',
  summary: 'Receivers of the station, retired ones too',
  params: stationParams,
  reply: z.object({ items: z.array(receiver) }),
});
export const addReceiver = endpoint({
  method: 'POST',
  path: '/stations/:stationId/receivers',
  summary: 'Add a receiver',
  params: stationParams,
  body: receiverFields.extend({ notes: longText.default('') }),
  reply: receiver,
  status: 201,
});
export const updateReceiver = endpoint({
  method: 'PATCH',
  path: '/stations/:stationId/receivers/:receiverId',
  summary: 'Rename, annotate, retire or bring back a receiver; its call sign stays once it has spots',
  params: receiverParams,
  body: receiverFields.partial().extend({ retired: z.boolean().optional() }),
  reply: receiver,
});

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

export const feedHealth = z.object({
  state: z.enum(['connecting', 'receiving', 'silent', 'lost', 'off']),
  connectedAt: instant.nullable(),
  lastLineAt: instant.nullable(),
  linesLastMinute: z.number(),
  linesTotal: z.number(),
  storedTotal: z.number(),
  doubledTotal: z.number(),
  refusedTotal: z.number(),
  otherReceiverTotal: z.number(),
  lastError: z.string().nullable(),
  updatedAt: instant,
});
export const feed = z.object({
  id,
  name: z.string(),
  host: z.string(),
  port: z.number().int(),
  loginCall: z.string(),
  enabled: z.boolean(),
  health: feedHealth.nullable(),
});
export type Feed = z.infer<typeof feed>;
const portSentence = 'Give a port from 1 to 65535.';
const feedFields = z.object({
  name: shortText(40),
  host: shortText(253).regex(/^[A-Za-z0-9.:-]+$/, 'Give a host name or an IP address.'),
  port: z.number(portSentence).int(portSentence).min(1, portSentence).max(65535, portSentence),
  loginCall: callSignText,
  enabled: z.boolean(),
});
const feedParams = stationParams.extend({ feedId: id });
export const listFeeds = endpoint({
  method: 'GET',
  path: '/stations/:stationId/feeds',
  summary: 'Live feeds and their health',
  params: stationParams,
  reply: z.object({ items: z.array(feed) }),
});
export const addFeed = endpoint({
  method: 'POST',
  path: '/stations/:stationId/feeds',
  summary: 'Add a live feed; the worker connects within seconds',
  params: stationParams,
  body: feedFields.extend({ enabled: z.boolean().default(true) }),
  reply: feed,
  status: 201,
});
export const updateFeed = endpoint({
  method: 'PATCH',
  path: '/stations/:stationId/feeds/:feedId',
  summary: 'Change or switch off a live feed',
  params: feedParams,
  body: feedFields.partial(),
  reply: feed,
});
export const removeFeed = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/feeds/:feedId',
  summary: 'Remove a live feed; its spots stay',
  params: feedParams,
  status: 204,
});
export const downloadFeedRefusals = endpoint({
  method: 'GET',
  path: '/stations/:stationId/feeds/:feedId/refusals.csv',
  summary: 'Lines that the feed sent and the program refused, with the reason',
  params: feedParams,
  reply: z.string(),
  media: { reply: 'text/csv' },
});

export const positionOverride = z.object({
  id,
  matches: z.enum(['call', 'prefix']),
  pattern: z.string(),
  locator: z.string(),
  radiusKm: z.number(),
});
export const listPositionOverrides = endpoint({
  method: 'GET',
  path: '/stations/:stationId/positions',
  summary: "The station's own corrections of where calls are",
  params: stationParams,
  reply: z.object({ items: z.array(positionOverride) }),
});
export const addPositionOverride = endpoint({
  method: 'POST',
  path: '/stations/:stationId/positions',
  summary: 'Say where a call, or all calls with a prefix, really are',
  params: stationParams,
  body: z.object({
    matches: z.enum(['call', 'prefix']),
    pattern: z
      .string()
      .trim()
      .toUpperCase()
      .regex(/^[A-Z0-9/]{1,16}$/, 'Give a call sign or a prefix of letters and digits.'),
    locator: locatorText,
    radiusKm: numberWithin(0, 10_000).default(50),
  }),
  reply: positionOverride,
  status: 201,
});
export const removePositionOverride = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/positions/:positionId',
  summary: 'Withdraw a position correction',
  params: stationParams.extend({ positionId: id }),
  status: 204,
});

export const member = z.object({ userId: uuid, name: z.string(), email: z.string(), role, since: instant });
export const invitation = z.object({
  id: uuid,
  email: z.string(),
  role,
  invitedBy: z.string().nullable(),
  createdAt: instant,
  expiresAt: instant,
});
export const listMembers = endpoint({
  method: 'GET',
  path: '/stations/:stationId/members',
  summary: 'Members and open invitations',
  params: stationParams,
  reply: z.object({ members: z.array(member), invitations: z.array(invitation) }),
});
export const inviteMember = endpoint({
  method: 'POST',
  path: '/stations/:stationId/invitations',
  summary: 'Invite a person by e-mail',
  params: stationParams,
  body: z.object({
    email: z.string().trim().toLowerCase().pipe(z.email('Give an e-mail address such as name@example.org.')),
    role,
  }),
  reply: invitation,
  status: 201,
});
export const withdrawInvitation = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/invitations/:invitationId',
  summary: 'Withdraw an open invitation',
  params: stationParams.extend({ invitationId: uuid }),
  status: 204,
});
const memberParams = stationParams.extend({ userId: uuid });
export const changeMemberRole = endpoint({
  method: 'PATCH',
  path: '/stations/:stationId/members/:userId',
  summary: "Change a member's role; ends that person's sessions. The last manager stays manager",
  params: memberParams,
  body: z.object({ role }),
  reply: member,
});
export const removeMember = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/members/:userId',
  summary: 'Remove a member. The last manager stays',
  params: memberParams,
  status: 204,
});

export const apiToken = z.object({
  id: uuid,
  name: z.string(),
  scopes: z.array(tokenScope),
  createdAt: instant,
  expiresAt: instant,
  lastUsedAt: instant.nullable(),
  revokedAt: instant.nullable(),
});
export const listTokens = endpoint({
  method: 'GET',
  path: '/stations/:stationId/tokens',
  summary: 'API tokens of the station, never their secrets',
  params: stationParams,
  reply: z.object({ items: z.array(apiToken) }),
});
export const makeToken = endpoint({
  method: 'POST',
  path: '/stations/:stationId/tokens',
  summary: 'Make an API token; the secret is shown this once',
  params: stationParams,
  body: z.object({
    name: shortText(60),
    scopes: z.array(tokenScope).min(1, 'Choose at least one scope.'),
    days: numberWithin(1, 730).int('Give whole days.').default(365),
  }),
  reply: z.object({ token: apiToken, secret: z.string() }),
  status: 201,
});
export const revokeToken = endpoint({
  method: 'DELETE',
  path: '/stations/:stationId/tokens/:tokenId',
  summary: 'Revoke an API token at once',
  params: stationParams.extend({ tokenId: uuid }),
  status: 204,
});

export const auditEntry = z.object({
  id: z.number(),
  at: instant,
  who: z.string(),
  action: z.string(),
  target: z.string(),
  detail: z.record(z.string(), z.unknown()),
});
export const listAudit = endpoint({
  method: 'GET',
  path: '/stations/:stationId/audit',
  summary: 'Who did what, newest first',
  params: stationParams,
  query: z.object({
    after: z.string().max(40).optional(),
    limit: z.coerce.number().int().min(1).max(200).default(50),
  }),
  reply: z.object({ items: z.array(auditEntry), next: z.string().nullable() }),
});

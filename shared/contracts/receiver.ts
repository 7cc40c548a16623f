import { z } from 'zod';
import { callSignText, endpoint, id, instant, longText, shortText, stationParams } from './common.ts';

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

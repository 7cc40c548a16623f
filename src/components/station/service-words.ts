interface Service {
  inServiceFrom: string | null;
  inServiceTo: string | null;
}

/** Whether an antenna is up on a UTC day (both ends included), and since or until when, in words. */
export function serviceWords(antenna: Service, today: string): { inService: boolean; words: string } {
  const { inServiceFrom: from, inServiceTo: to } = antenna;
  if (from !== null && today < from) return { inService: true, words: `In service from ${from} on` };
  if (to !== null && today > to)
    return { inService: false, words: `Out of service${from ? `: ${from} to ${to}` : ` since ${to}`}` };
  const since = from === null ? 'In service' : `In service since ${from}`;
  return { inService: true, words: to === null ? since : `${since}, last day ${to}` };
}

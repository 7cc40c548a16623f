/** A point on the earth in WGS-84 degrees: north and east positive, longitude within -180 to 180. */
export interface Place {
  latitude: number;
  longitude: number;
}

/** What a parser hands back when it cannot use its input: one sentence a person can act on. */
export interface Refusal {
  reason: string;
}

/** Tells a refusal from a result, so that callers narrow with one word. */
export function isRefusal(result: object): result is Refusal {
  return 'reason' in result;
}

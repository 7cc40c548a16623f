import type { ReplyOf } from '../../../shared/contracts/endpoint.ts';
import type { mapSpots } from '../../../shared/contracts/spot.ts';

/** One station of the map: where it is and how often it was heard. */
export type HeardStation = ReplyOf<typeof mapSpots>['stations'][number];

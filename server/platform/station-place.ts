import tzLookup from '@photostructure/tz-lookup';
import { parseLocator } from '../../shared/radio/locator.ts';
import { isRefusal } from '../../shared/radio/place.ts';
import type { Refusal } from '../../shared/radio/place.ts';

export interface StationPlace {
  locator: string;
  latitudeDeg: number;
  longitudeDeg: number;
  timeZone: string;
  ituRegion: number;
}

/** Everything that follows from where a station stands. The manager may change zone and region afterwards. */
export function stationPlace(locator: string): StationPlace | Refusal {
  const cell = parseLocator(locator);
  if (isRefusal(cell)) return cell;
  return {
    locator: cell.locator,
    latitudeDeg: cell.latitude,
    longitudeDeg: cell.longitude,
    timeZone: tzLookup(cell.latitude, cell.longitude),
    ituRegion: ituRegionOf(cell.latitude, cell.longitude),
  };
}

/**
 * A first guess by longitude; the true borders (ITU Radio Regulations, Article 5.2 to 5.9) run along
 * coasts and frontiers. It decides nothing but which band limits are shown.
 */
function ituRegionOf(latitude: number, longitude: number): number {
  if (longitude < -20 && !(latitude > 60 && longitude > -30)) return longitude < -170 ? 3 : 2;
  return longitude < 60 || (latitude > 42 && longitude > 60 && longitude < 180) ? 1 : 3;
}

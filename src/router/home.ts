import type { RouteLocationRaw } from 'vue-router';
import type { Profile } from '../../shared/contracts/auth.ts';
import { may } from '../../shared/contracts/permission.ts';
import type { Role } from '../../shared/contracts/permission.ts';
import { stationPages } from './routes.ts';
import type { StationPageName } from './routes.ts';

/** Where each role starts its day; the first that exists. */
const homes: Record<Role, StationPageName[]> = {
  manager: ['tonight', 'station', 'settings'],
  operator: ['switching', 'tonight', 'settings'],
  analyst: ['compare', 'tonight', 'settings'],
  contester: ['tonight', 'compare', 'settings'],
};

/** The start page of a person at a station (their first one unless said); null without any station. */
export function homeOf(profile: Profile, stationId?: number): RouteLocationRaw | null {
  const membership =
    profile.memberships.find((each) => each.stationId === stationId) ?? profile.memberships[0];
  if (!membership) return null;
  const name = homes[membership.role].find((wanted) =>
    stationPages.some((page) => page.name === wanted && may(membership.role, page.permission)),
  );
  return name ? { name, params: { stationId: membership.stationId } } : null;
}

/** A path inside this site, or null: a link to sign in must not be able to send people elsewhere. */
export function safeReturnPath(value: unknown): string | null {
  if (typeof value !== 'string' || !value.startsWith('/') || /^\/[/\\]/.test(value)) return null;
  return value.startsWith('/sign-in') ? null : value;
}

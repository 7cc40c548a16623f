import { createRouter, createWebHistory } from 'vue-router';
import type { RouteLocation, RouteLocationRaw, Router, RouterHistory } from 'vue-router';
import { may } from '../../shared/contracts/permission.ts';
import { useSessionStore } from '../stores/session.ts';
import { homeOf } from './home.ts';
import { routes } from './routes.ts';

export const productName = 'Whichwire';

type Asked = Pick<RouteLocation, 'name' | 'path' | 'fullPath' | 'params' | 'query' | 'hash' | 'meta'>;

/**
 * Who may see what: true, or where to go instead. Asks who is signed in when that is not known yet.
 */
export async function admit(to: Asked): Promise<true | RouteLocationRaw> {
  const session = useSessionStore();
  if (to.meta.isPublic && to.name !== 'sign-in') return true;
  await session.restore();
  const { profile } = session;
  if (to.name === 'sign-in') return profile ? { name: 'home' } : true;
  if (!profile) return { name: 'sign-in', query: to.fullPath === '/' ? {} : { next: to.fullPath } };
  if (to.name === 'home') return homeOf(profile, Number(to.query.station) || undefined) ?? true;
  // A foreign station and one that never was look the same; so do pages beyond the person's role.
  const membership = profile.memberships.find((each) => each.stationId === Number(to.params.stationId));
  const permitted = membership && (!to.meta.permission || may(membership.role, to.meta.permission));
  if (permitted) return true;
  return {
    name: 'not-found',
    params: { path: to.path.slice(1).split('/') },
    query: to.query,
    hash: to.hash,
  };
}

/** The router with its guards; pinia must be installed first. Tests pass a memory history. */
export function createAppRouter(history: RouterHistory = createWebHistory()): Router {
  const router = createRouter({
    history,
    routes,
    // A page with anchors goes to the one asked for by itself, once it stands.
    scrollBehavior: (to, from, saved) => saved ?? (to.path === from.path || to.hash ? false : { top: 0 }),
  });

  router.beforeEach(admit);
  router.afterEach((to, _from, failure) => {
    if (failure) return;
    document.title = to.meta.title ? `${to.meta.title} - ${productName}` : productName;
  });

  return router;
}

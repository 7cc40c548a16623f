import type { Component } from 'vue';
import type { RouteRecordRaw } from 'vue-router';
import type { Permission } from '../../shared/contracts/permission.ts';

declare module 'vue-router' {
  interface RouteMeta {
    /** Title of the document, before the product's name. */
    title?: string;
    /** May be seen without being signed in. */
    isPublic?: boolean;
    /** What the person must be allowed at the station of the route. */
    permission?: Permission;
    /** The place in the rail that is lit while this page is shown, where it has none of its own. */
    rail?: StationPageName;
  }
}

/** The pages of a station: route names, and the keys of the rail's icons. */
export type StationPageName =
  | 'tonight'
  | 'compare'
  | 'ladder'
  | 'switching'
  | 'spots'
  | 'imports'
  | 'station'
  | 'reports'
  | 'members'
  | 'methods'
  | 'settings';

export interface StationPage {
  /** Route name, and its path below /s/:stationId/. */
  name: StationPageName;
  /** Word under the icon, and the document's title. */
  word: string;
  permission: Permission;
  view: () => Promise<Component>;
  /** Never in a phone's bottom bar: it would push out what is needed at the switch. */
  isBehindMore?: boolean;
}

/**
 * The table of pages, in the order of the rail; one line each. On a phone the first three that the person may see
 * get a place in the bottom bar, the rest is behind "More".
 */
export const stationPages: readonly StationPage[] = [
  {
    name: 'tonight',
    word: 'Tonight',
    permission: 'station:read',
    view: () => import('../views/TonightView.vue'),
  },
  {
    name: 'compare',
    word: 'Compare',
    permission: 'comparison:read',
    view: () => import('../views/CompareView.vue'),
  },
  {
    name: 'ladder',
    word: 'Ladder',
    permission: 'comparison:read',
    view: () => import('../views/LadderView.vue'),
    isBehindMore: true,
  },
  {
    name: 'switching',
    word: 'Switching',
    permission: 'dwell:read',
    view: () => import('../views/SwitchingView.vue'),
  },
  { name: 'spots', word: 'Spots', permission: 'spot:read', view: () => import('../views/SpotsView.vue') },
  {
    name: 'imports',
    word: 'Imports',
    permission: 'import:read',
    view: () => import('../views/ImportsView.vue'),
  },
  {
    name: 'station',
    word: 'Station',
    permission: 'station:read',
    view: () => import('../views/StationView.vue'),
  },
  {
    name: 'reports',
    word: 'Reports',
    permission: 'finding:read',
    view: () => import('../views/FindingsView.vue'),
  },
  {
    name: 'members',
    word: 'Members',
    permission: 'member:read',
    view: () => import('../views/MembersView.vue'),
  },
  {
    name: 'methods',
    word: 'Methods',
    permission: 'station:read',
    view: () => import('../views/MethodsView.vue'),
  },
  {
    name: 'settings',
    word: 'Settings',
    permission: 'station:read',
    view: () => import('../views/SettingsView.vue'),
  },
];

export const routes: RouteRecordRaw[] = [
  {
    path: '/',
    name: 'home',
    component: () => import('../views/NoStationView.vue'),
    meta: { title: 'No station' },
  },
  {
    path: '/sign-in',
    name: 'sign-in',
    component: () => import('../views/SignInView.vue'),
    meta: { title: 'Sign in', isPublic: true },
  },
  {
    path: '/invitation',
    name: 'invitation',
    component: () => import('../views/InvitationView.vue'),
    meta: { title: 'Invitation', isPublic: true },
  },
  {
    path: '/password-reset',
    name: 'password-reset',
    component: () => import('../views/PasswordResetView.vue'),
    meta: { title: 'New password', isPublic: true },
  },
  {
    path: '/set-up',
    name: 'set-up',
    component: () => import('../views/SetUpView.vue'),
    meta: { title: 'Set up', isPublic: true },
  },
  {
    path: '/f',
    name: 'shared-finding',
    component: () => import('../views/SharedFindingView.vue'),
    meta: { title: 'Finding', isPublic: true },
  },
  {
    path: '/demo-mail',
    name: 'demo-mail',
    component: () => import('../views/DemoMailView.vue'),
    meta: { title: 'Demo mail', isPublic: true },
  },
  {
    path: String.raw`/s/:stationId(\d+)`,
    component: () => import('../views/StationFrameView.vue'),
    children: [
      { path: '', redirect: (to) => ({ name: 'home', query: { station: to.params.stationId } }) },
      ...stationPages.map(({ name, word, permission, view }): RouteRecordRaw => ({
        path: name,
        name,
        component: view,
        meta: { title: word, permission },
      })),
      // Reached from Compare; no place of its own in the rail.
      {
        path: 'trials',
        name: 'trials',
        component: () => import('../views/TrialsView.vue'),
        meta: { title: 'Trials', permission: 'trial:read' },
      },
      {
        path: String.raw`reports/:findingId(\d+)`,
        name: 'finding',
        component: () => import('../views/FindingView.vue'),
        meta: { title: 'Finding', permission: 'finding:read', rail: 'reports' },
      },
      {
        path: String.raw`imports/:importId(\d+)`,
        name: 'import',
        component: () => import('../views/ImportView.vue'),
        meta: { title: 'Import', permission: 'import:read', rail: 'imports' },
      },
    ],
  },
  {
    path: '/:path(.*)*',
    name: 'not-found',
    component: () => import('../views/NotFoundView.vue'),
    meta: { title: 'Not found', isPublic: true },
  },
];

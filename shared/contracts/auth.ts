import { z } from 'zod';
import { callSignText, endpoint, id, instant, shortText } from './common.ts';
import { role } from './permission.ts';

export const email = z
  .string()
  .trim()
  .toLowerCase()
  .max(254, 'Use at most 254 characters.')
  .pipe(z.email('Give an e-mail address such as name@example.org.'));
export const newPassword = z
  .string()
  .min(12, 'Use at least 12 characters.')
  .max(200, 'Use at most 200 characters.');

export const membershipSummary = z.object({
  stationId: id,
  stationName: z.string(),
  callSign: z.string(),
  role,
});
export const profile = z.object({
  id: z.uuid(),
  email: z.string(),
  name: z.string(),
  lengthUnit: z.enum(['m', 'ft']),
  theme: z.enum(['system', 'dark', 'light']),
  createdAt: instant,
  memberships: z.array(membershipSummary),
});
export type Profile = z.infer<typeof profile>;

/** The access token lives ten minutes and stays in memory; the refresh cookie is the browser's affair. */
export const signedIn = z.object({ accessToken: z.string(), expiresAt: instant, profile });
export type SignedIn = z.infer<typeof signedIn>;

const token = z.string().min(20).max(200);

export const signIn = endpoint({
  method: 'POST',
  path: '/auth/sign-in',
  summary: 'Sign in with e-mail and password; sets the refresh cookie',
  body: z.object({ email, password: z.string().min(1, 'Give your password.').max(200) }),
  reply: signedIn,
});
export const refresh = endpoint({
  method: 'POST',
  path: '/auth/refresh',
  summary: 'Exchange the refresh cookie for a new one and a new access token',
  reply: signedIn,
});
export const signOut = endpoint({
  method: 'POST',
  path: '/auth/sign-out',
  summary: 'End this session',
  status: 204,
});
export const askPasswordReset = endpoint({
  method: 'POST',
  path: '/auth/password-reset',
  summary: 'Ask for a reset link by e-mail; the answer is the same whether or not the address is known',
  body: z.object({ email }),
  status: 204,
});
export const resetPassword = endpoint({
  method: 'POST',
  path: '/auth/password-reset/confirm',
  summary: 'Set a new password with the token of a reset link; ends all sessions',
  body: z.object({ token, password: newPassword }),
  status: 204,
});
export const readInvitation = endpoint({
  method: 'POST',
  path: '/auth/invitation/read',
  summary: 'What an invitation offers (the token goes in the body, so that no log keeps it)',
  body: z.object({ token }),
  reply: z.object({
    stationName: z.string(),
    email: z.string(),
    role,
    expiresAt: instant,
    hasAccount: z.boolean(),
  }),
});
export const acceptInvitation = endpoint({
  method: 'POST',
  path: '/auth/invitation/accept',
  summary: 'Accept an invitation: a new person gives name and password, a known one their password',
  body: z.object({ token, name: shortText(80).optional(), password: z.string().min(1).max(200) }),
  reply: signedIn,
});

/** The demo's one-click accounts; empty outside demo mode. */
export const demoAccounts = endpoint({
  method: 'GET',
  path: '/auth/demo-accounts',
  summary: 'The demo accounts, empty outside demo mode',
  reply: z.object({
    accounts: z.array(
      z.object({ email: z.string(), name: z.string(), role, password: z.string(), does: z.string() }),
    ),
  }),
});
export const demoMail = endpoint({
  method: 'GET',
  path: '/auth/demo-mail',
  summary: 'Messages that the demo would have sent by e-mail; empty outside demo mode',
  reply: z.object({
    messages: z.array(
      z.object({
        at: instant,
        to: z.string(),
        subject: z.string(),
        text: z.string(),
        link: z.string().nullable(),
      }),
    ),
  }),
});

export const readProfile = endpoint({
  method: 'GET',
  path: '/me',
  summary: 'Who is signed in',
  reply: profile,
});
export const updateProfile = endpoint({
  method: 'PATCH',
  path: '/me',
  summary: 'Change name, length unit or theme',
  body: z.object({
    name: shortText(80).optional(),
    lengthUnit: z.enum(['m', 'ft']).optional(),
    theme: z.enum(['system', 'dark', 'light']).optional(),
  }),
  reply: profile,
});
export const changePassword = endpoint({
  method: 'POST',
  path: '/me/password',
  summary: 'Change the own password; ends all other sessions',
  body: z.object({ current: z.string().min(1).max(200), next: newPassword }),
  reply: signedIn,
});
export const sessionSummary = z.object({
  id: z.uuid(),
  userAgent: z.string(),
  createdAt: instant,
  lastUsedAt: instant,
  isThis: z.boolean(),
});
export const listSessions = endpoint({
  method: 'GET',
  path: '/me/sessions',
  summary: 'Browsers that are signed in',
  reply: z.object({ items: z.array(sessionSummary) }),
});
export const endSession = endpoint({
  method: 'DELETE',
  path: '/me/sessions/:sessionId',
  summary: 'Sign one browser out',
  params: z.object({ sessionId: z.uuid() }),
  status: 204,
});

/** First person of a fresh installation: makes the station and its manager with the set-up link. */
export const setUp = endpoint({
  method: 'POST',
  path: '/auth/set-up',
  summary: 'Make the first station and its manager with the one-time set-up token',
  body: z.object({
    token,
    email,
    name: shortText(80),
    password: newPassword,
    station: z.object({ name: shortText(80), callSign: callSignText, locator: shortText(10) }),
  }),
  reply: signedIn,
});

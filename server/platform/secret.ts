import { createHash, randomBytes } from 'node:crypto';

/** A secret for a link or a token: 32 random bytes, URL-safe. */
export function makeSecret(prefix = ''): string {
  return prefix + randomBytes(32).toString('base64url');
}

/**
 * What is kept of a secret. A fast hash is enough for 256 random bits; looking the row up by the hash also
 * makes the comparison's time independent of the secret.
 */
export function hashSecret(secret: string): Buffer {
  return createHash('sha256').update(secret).digest();
}

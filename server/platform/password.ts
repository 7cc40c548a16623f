import argon2 from 'argon2';

/** argon2id with OWASP's second recommended setting: 19 MiB, 2 passes, 1 lane. */
const settings = { type: argon2.argon2id, memoryCost: 19_456, timeCost: 2, parallelism: 1 } as const;

export const hashPassword = (password: string): Promise<string> => argon2.hash(password, settings);

export const verifyPassword = (hash: string, password: string): Promise<boolean> =>
  argon2.verify(hash, password);

let decoy: Promise<string> | null = null;

/** Takes as long as a real check and fails: an unknown address must not answer faster than a wrong password. */
export async function verifyNothing(password: string): Promise<false> {
  decoy ??= hashPassword('nobody has this password');
  await verifyPassword(await decoy, password);
  return false;
}

import { z } from 'zod';

const flag = z
  .enum(['0', '1', 'true', 'false', ''])
  .default('0')
  .transform((v) => v === '1' || v === 'true');

const environment = z.object({
  DATABASE_URL: z.string().min(1, 'DATABASE_URL is missing: give a PostgreSQL address.'),
  DATABASE_POOL: z.coerce.number().int().min(1).max(200).default(10),
  HOST: z.string().default('127.0.0.1'),
  PORT: z.coerce.number().int().min(0).max(65535).default(4180),
  PUBLIC_URL: z.string().optional(),
  JWT_SECRET: z.string().min(32, 'JWT_SECRET must have at least 32 characters.'),
  DEMO: flag,
  MAIL_URL: z.string().default(''),
  MAIL_FROM: z.string().default('Whichwire <whichwire@localhost>'),
  TRUST_PROXY: z.coerce.number().int().min(0).max(5).default(0),
  METRICS_TOKEN: z.string().default(''),
  LOG_LEVEL: z.enum(['fatal', 'error', 'warn', 'info', 'debug', 'silent']).default('info'),
  CLIENT_FOLDER: z.string().default(''),
  SETUP_TOKEN: z.string().default(''),
});

export interface Config {
  databaseUrl: string;
  databasePool: number;
  host: string;
  port: number;
  /** Where people reach the site; links in e-mails start with it. */
  publicUrl: string;
  jwtSecret: string;
  /** One-click accounts, the fake mailbox and the simulated feed: never in a real station. */
  demo: boolean;
  mailUrl: string;
  mailFrom: string;
  /** How many reverse proxies stand in front (their X-Forwarded-For is believed). */
  trustProxy: number;
  metricsToken: string;
  logLevel: string;
  clientFolder: string;
  /** Given at the first start of a real station: whoever holds it makes the first manager. */
  setUpToken: string;
}

/** Reads the environment once; says in a sentence which variable is wrong. Throws Error. */
export function readConfig(env: NodeJS.ProcessEnv): Config {
  const parsed = environment.safeParse(env);
  if (!parsed.success) {
    const sentences = parsed.error.issues.map((issue) => `${issue.path.join('.')}: ${issue.message}`);
    throw new Error(`The environment is not complete. ${sentences.join(' ')}`);
  }
  const e = parsed.data;
  return {
    databaseUrl: e.DATABASE_URL,
    databasePool: e.DATABASE_POOL,
    host: e.HOST,
    port: e.PORT,
    publicUrl: e.PUBLIC_URL ?? `http://${e.HOST}:${e.PORT}`,
    jwtSecret: e.JWT_SECRET,
    demo: e.DEMO,
    mailUrl: e.MAIL_URL,
    mailFrom: e.MAIL_FROM,
    trustProxy: e.TRUST_PROXY,
    metricsToken: e.METRICS_TOKEN,
    logLevel: e.LOG_LEVEL,
    clientFolder: e.CLIENT_FOLDER,
    setUpToken: e.SETUP_TOKEN,
  };
}

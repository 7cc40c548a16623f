import { SMTPServer } from 'smtp-server';

export interface DemoMessage {
  at: Date;
  to: string;
  subject: string;
  text: string;
}

export interface DemoMailbox {
  url: string;
  messages(): DemoMessage[];
  /** Resolves with the next message that arrives; tests wait for it instead of polling. */
  next(): Promise<DemoMessage>;
  close(): Promise<void>;
}

const keptMessages = 50;

/**
 * A local SMTP server that keeps messages in memory and delivers none: what the demo and the tests have in
 * place of a mail provider. It listens on loopback only.
 */
export async function startDemoMailbox(): Promise<DemoMailbox> {
  const kept: DemoMessage[] = [];
  const waiting: ((message: DemoMessage) => void)[] = [];
  const server = new SMTPServer({
    disabledCommands: ['AUTH', 'STARTTLS'],
    logger: false,
    onData(stream, session, done) {
      const parts: Buffer[] = [];
      stream.on('data', (part: Buffer) => parts.push(part));
      stream.on('end', () => {
        const message = readMessage(
          Buffer.concat(parts).toString('utf8'),
          session.envelope.rcptTo[0]?.address ?? '',
        );
        kept.push(message);
        kept.splice(0, kept.length - keptMessages);
        waiting.splice(0).forEach((resolve) => resolve(message));
        done();
      });
    },
  });
  await new Promise<void>((resolve, reject) => {
    server.once('error', reject);
    server.listen(0, '127.0.0.1', resolve);
  });
  const address = server.server.address();
  if (address === null || typeof address === 'string') throw new Error('The demo mailbox has no port.');
  return {
    url: `smtp://127.0.0.1:${address.port}?ignoreTLS=true`,
    messages: () => [...kept],
    next: () => new Promise((resolve) => waiting.push(resolve)),
    close: () => new Promise((resolve) => server.close(() => resolve())),
  };
}

/** Reads only what our own mailer writes: one text part, quoted-printable, base64 or plain. */
function readMessage(raw: string, to: string): DemoMessage {
  const split = raw.indexOf('\r\n\r\n');
  const head = raw.slice(0, split).replace(/\r\n[ \t]+/g, ' ');
  const header = (name: string) => new RegExp(`^${name}:\\s*(.*)$`, 'im').exec(head)?.[1]?.trim() ?? '';
  const encoding = header('Content-Transfer-Encoding').toLowerCase();
  const body = raw.slice(split + 4);
  return {
    at: new Date(),
    to,
    subject: decodeWords(header('Subject')),
    text: decodeBody(body, encoding).trim(),
  };
}

function decodeBody(body: string, encoding: string): string {
  if (encoding === 'base64') return Buffer.from(body, 'base64').toString('utf8');
  if (encoding !== 'quoted-printable') return body.replace(/\r\n/g, '\n');
  const bytes = body
    .replace(/=\r\n/g, '')
    .replace(/\r\n/g, '\n')
    .replace(/=([0-9A-F]{2})/g, (_all, hex: string) => String.fromCharCode(parseInt(hex, 16)));
  return Buffer.from(bytes, 'latin1').toString('utf8');
}

function decodeWords(text: string): string {
  return text
    .replace(/\?=\s+=\?/g, '?==?')
    .replace(/=\?utf-8\?([bq])\?([^?]*)\?=/gi, (_all, kind: string, word: string) =>
      kind.toLowerCase() === 'b'
        ? Buffer.from(word, 'base64').toString('utf8')
        : decodeBody(word.replace(/_/g, ' '), 'quoted-printable'),
    );
}

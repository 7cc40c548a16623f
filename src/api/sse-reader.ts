/**
 * Bytes of a text/event-stream in, `data` of each message out (WHATWG HTML, section 9.2.6). Chunks may end
 * anywhere, inside a character or between CR and LF. Event names, ids and retry times are not used here.
 */
export class SseReader {
  private readonly decoder = new TextDecoder();
  private line = '';
  private data: string[] = [];
  private afterCr = false;

  constructor(private readonly onMessage: (data: string) => void) {}

  push(chunk: Uint8Array): void {
    for (const character of this.decoder.decode(chunk, { stream: true })) {
      const wasCr = this.afterCr;
      this.afterCr = character === '\r';
      if (character === '\n' && wasCr) continue;
      if (character === '\n' || character === '\r') this.endLine();
      else this.line += character;
    }
  }

  private endLine(): void {
    const line = this.line;
    this.line = '';
    if (line === '') {
      if (this.data.length > 0) this.onMessage(this.data.join('\n'));
      this.data = [];
      return;
    }
    const match = /^data(?:: ?(.*))?$/s.exec(line);
    if (match) this.data.push(match[1] ?? '');
  }
}

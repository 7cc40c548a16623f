/** Longer than any spot line with all its extras; a feed without line ends must not fill the memory. */
export const longestLineBytes = 512;

export interface SplitLine {
  /** Without its end. Bytes that are not UTF-8 are replaced by U+FFFD. */
  text: string;
  /** The line went on past the limit; `text` is its beginning and the rest was thrown away. */
  cut: boolean;
}

export interface LineSplitter {
  /** The lines that this chunk completes, in order; a chunk may begin and end anywhere. */
  push(chunk: Uint8Array): SplitLine[];
  /** What is left when the stream ends: a last line without an end, or null. */
  end(): SplitLine | null;
}

const CR = 0x0d;
const LF = 0x0a;

/**
 * Bytes -> lines. CR LF, LF and CR alone end a line. The bytes of a line are decoded together, so that a
 * character may be cut by the network anywhere; neither CR nor LF occurs inside a character of UTF-8.
 */
export function createLineSplitter(limitBytes = longestLineBytes): LineSplitter {
  const decoder = new TextDecoder('utf-8', { ignoreBOM: true });
  const line = new Uint8Array(limitBytes);
  let length = 0;
  let cut = false;
  let lastWasCr = false;

  function take(): SplitLine {
    const taken = { text: decoder.decode(line.subarray(0, length)), cut };
    length = 0;
    cut = false;
    return taken;
  }

  function keep(bytes: Uint8Array): void {
    const room = limitBytes - length;
    if (bytes.length > room) cut = true;
    const kept = bytes.length > room ? bytes.subarray(0, room) : bytes;
    line.set(kept, length);
    length += kept.length;
  }

  return {
    push(chunk) {
      const lines: SplitLine[] = [];
      let from = 0;
      for (let i = 0; i < chunk.length; i++) {
        const byte = chunk[i];
        if (byte !== CR && byte !== LF) {
          lastWasCr = false;
          continue;
        }
        const endsSameLine = byte === LF && lastWasCr;
        lastWasCr = byte === CR;
        if (!endsSameLine) {
          keep(chunk.subarray(from, i));
          lines.push(take());
        }
        from = i + 1;
      }
      keep(chunk.subarray(from));
      return lines;
    },
    end() {
      lastWasCr = false;
      return length > 0 || cut ? take() : null;
    },
  };
}

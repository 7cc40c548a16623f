import { parseCallSign } from '../../shared/radio/call-sign.ts';
import { isRefusal, type Refusal } from '../../shared/radio/place.ts';

/** A night hears a few thousand different ones. */
const longestMemory = 50_000;

/**
 * Reads call signs as written in lines and files: gives the call in the one form under which it is stored,
 * or the reason why it is none. It remembers what it has read, since the same calls come again and again
 * and taking one apart costs more than all the rest of a line.
 */
export function createCallReader(): (written: string) => string | Refusal {
  let known = new Map<string, string | Refusal>();
  return (written) => {
    const before = known.get(written);
    if (before !== undefined) return before;
    const parsed = parseCallSign(written);
    const result = isRefusal(parsed) ? parsed : parsed.call;
    if (known.size >= longestMemory) known = new Map();
    known.set(written, result);
    return result;
  };
}

import { parseCallSign } from './call-sign.ts';
import { isRefusal, type Refusal } from './place.ts';
import { copyText, remember } from './remember.ts';

/**
 * Reads call signs as written in lines and files: gives the call in the one form under which it is stored,
 * or the reason why it is none. It remembers what it has read: taking a call apart costs more than all the
 * rest of a line.
 */
export function createCallReader(): (written: string) => string | Refusal {
  return remember((written) => {
    const parsed = parseCallSign(written);
    return isRefusal(parsed) ? parsed : copyText(parsed.call);
  });
}

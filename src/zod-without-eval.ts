/**
 * zod writes its fast parsers with `new Function`, which the content security policy forbids: the attempt alone
 * would be reported as a violation. Imported before anything that makes a schema.
 */
import { z } from 'zod';

z.config({ jitless: true });

import { readFileSync } from 'node:fs';
import packageFile from '../../package.json' with { type: 'json' };

/**
 * "0.1.0 (build 3f2a91c07b5e)": the release and, in a built program, what its sources' fingerprint begins with
 * (dist/built-server.json, written by the build beside the bundle).
 */
export function programVersion(): string {
  const build = readBuildId(new URL('./built-server.json', import.meta.url));
  return build === null ? packageFile.version : `${packageFile.version} (build ${build})`;
}

export function readBuildId(note: URL): string | null {
  let text: string;
  try {
    text = readFileSync(note, 'utf8');
  } catch (error) {
    if ((error as NodeJS.ErrnoException).code === 'ENOENT') return null;
    throw error;
  }
  return (JSON.parse(text) as { fingerprint: string }).fingerprint.slice(0, 12);
}

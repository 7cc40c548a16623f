/** Where the API lives. Relative to the page's own origin; tests against a real server set another. */
let base = '/api';

export function setApiBase(url: string): void {
  base = url;
}

type Part = string | number | boolean | null | undefined | readonly (string | number)[];

/**
 * The address of a contract's path. Parameters in the path are escaped; query entries that are null or undefined
 * are left out, lists repeat their key.
 * @throws RangeError when a parameter of the path is not given: a mistake of the caller.
 */
export function apiUrl(path: string, params?: unknown, query?: unknown): string {
  const given = (params ?? {}) as Record<string, string | number | undefined>;
  const filled = path.replaceAll(/:([A-Za-z]+)/g, (_, name: string) => {
    const value = given[name];
    if (value === undefined || value === '') throw new RangeError(`${path} needs ${name}`);
    return encodeURIComponent(value);
  });
  const search = new URLSearchParams();
  for (const [key, value] of Object.entries(query ?? {}) as [string, Part][]) {
    if (value === null || value === undefined) continue;
    if (Array.isArray(value)) for (const one of value) search.append(key, String(one));
    else search.append(key, String(value));
  }
  const tail = search.size > 0 ? `?${search}` : '';
  return `${base}${filled}${tail}`;
}

import type { Route } from './platform/route.ts';

/** A plain page that lists the interface for people; programs read /api/openapi.json. No script, no styles from elsewhere. */
export function apiDocsPage(routes: Route[]): string {
  const rows = routes
    .map(
      (r) =>
        `<tr><td><code>${r.endpoint.method}</code></td><td><code>/api${escape(r.endpoint.path)}</code></td>` +
        `<td>${escape(r.endpoint.summary)}</td><td>${escape(who(r))}</td></tr>`,
    )
    .join('\n');
  return `<!doctype html><html lang="en"><head><meta charset="utf-8"><title>Whichwire: interface</title>
<meta name="viewport" content="width=device-width, initial-scale=1">
<style>body{font-family:system-ui,sans-serif;max-width:75rem;margin:2rem auto;padding:0 1rem;line-height:1.5}
table{border-collapse:collapse;width:100%}td,th{border-bottom:1px solid #ccc;padding:.4rem;text-align:left;vertical-align:top}</style>
</head><body><h1>Whichwire: interface</h1>
<p>JSON over HTTP. Send <code>Authorization: Bearer</code> with an access token (sign-in) or an API token.
Times are ISO 8601 in UTC. Errors are <code>application/problem+json</code> (RFC 9457).
The machine-readable document is <a href="/api/openapi.json">openapi.json</a>.</p>
<table><thead><tr><th>Method</th><th>Address</th><th>What it does</th><th>Who may call it</th></tr></thead>
<tbody>${rows}</tbody></table></body></html>`;
}

function who(r: Route): string {
  if (r.access.kind === 'public') return 'anybody';
  if (r.access.kind === 'session') return 'whoever is signed in';
  return r.access.permission + (r.access.tokenScope ? `, API tokens with ${r.access.tokenScope}` : '');
}

function escape(text: string): string {
  return text.replace(/[&<>"]/g, (c) => ({ '&': '&amp;', '<': '&lt;', '>': '&gt;', '"': '&quot;' })[c] ?? c);
}

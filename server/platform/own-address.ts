import { BlockList, isIP } from 'node:net';

const own = new BlockList();
own.addSubnet('0.0.0.0', 8);
own.addSubnet('127.0.0.0', 8);
own.addSubnet('169.254.0.0', 16);
own.addAddress('::', 'ipv6');
own.addAddress('::1', 'ipv6');
own.addSubnet('fe80::', 10, 'ipv6');
// IPv4 in IPv6's clothes would walk round the rules above.
own.addSubnet('::ffff:0:0', 96, 'ipv6');

/** Names and numbers that the resolver takes for an address: 2130706433, 0x7f.1 and 127.1 are all this machine. */
const numericHost = /^(0x[0-9a-f]*|[0-9]+)(\.(0x[0-9a-f]*|[0-9]+))*\.?$/i;

/**
 * Whether a host is this machine itself, or reaches services that only machines on the same link may ask, or
 * is written so that nobody can tell. A name that resolves to such an address is not seen here.
 */
export function isOwnAddress(host: string): boolean {
  const name = host.replace(/^\[(.*)\]$/, '$1').toLowerCase();
  const version = isIP(name);
  if (version !== 0) return own.check(name, version === 6 ? 'ipv6' : 'ipv4');
  if (name.includes(':') || numericHost.test(name)) return true;
  return /(^|\.)localhost\.?$/.test(name);
}

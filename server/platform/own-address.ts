import { BlockList, isIPv4, isIPv6 } from 'node:net';

const ownIpv4 = new BlockList();
ownIpv4.addSubnet('0.0.0.0', 8);
ownIpv4.addSubnet('127.0.0.0', 8);
ownIpv4.addSubnet('169.254.0.0', 16);
// A list of its own: asked about an IPv4 address, Node would take it for a mapped one and find the last rule.
const ownIpv6 = new BlockList();
ownIpv6.addAddress('::', 'ipv6');
ownIpv6.addAddress('::1', 'ipv6');
ownIpv6.addSubnet('fe80::', 10, 'ipv6');
// IPv4 in IPv6's clothes would walk round the rules above.
ownIpv6.addSubnet('::ffff:0:0', 96, 'ipv6');

/** Names and numbers that the resolver takes for an address: 2130706433, 0x7f.1 and 127.1 are all this machine. */
const numericHost = /^(0x[0-9a-f]*|[0-9]+)(\.(0x[0-9a-f]*|[0-9]+))*\.?$/i;

/**
 * Whether a host is this machine itself, or reaches services that only machines on the same link may ask, or
 * is written so that nobody can tell. A name that resolves to such an address is not seen here.
 */
export function isOwnAddress(host: string): boolean {
  const name = host.replace(/^\[(.*)\]$/, '$1').toLowerCase();
  if (isIPv4(name)) return ownIpv4.check(name, 'ipv4');
  if (isIPv6(name)) return ownIpv6.check(name, 'ipv6');
  if (name.includes(':') || numericHost.test(name)) return true;
  return /(^|\.)localhost\.?$/.test(name);
}

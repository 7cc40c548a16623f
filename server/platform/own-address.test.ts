import { describe, expect, it } from 'vitest';
import { isOwnAddress } from './own-address.ts';

describe('addresses of the server itself', () => {
  it.each([
    'localhost',
    'LOCALHOST.',
    'feed.localhost',
    '127.0.0.1',
    '127.8.9.10',
    '127.1',
    '2130706433',
    '0x7f.0.0.1',
    '0x7f000001',
    '0177.0.0.1',
    '0',
    '0.0.0.0',
    '169.254.169.254',
    '::1',
    '[::1]',
    '::',
    '0:0:0:0:0:0:0:1',
    '0000:0000::0001',
    '::ffff:127.0.0.1',
    '::ffff:7f00:1',
    'fe80::1',
    'febf::1',
  ])('holds %s for one', (host) => expect(isOwnAddress(host)).toBe(true));

  it.each([
    'skimmer.example.org',
    'localhost.example.org',
    'localhosts',
    '192.168.1.20',
    '10.0.0.7',
    '126.255.255.255',
    '128.0.0.1',
    '2001:db8::20',
    'fd00::5',
    'fec0::1',
    '7f.example',
  ])('lets %s through', (host) => expect(isOwnAddress(host)).toBe(false));
});

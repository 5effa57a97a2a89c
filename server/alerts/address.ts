import { BlockList, isIP } from 'node:net'

/** Networks that are not the public internet: IANA special-purpose registries for IPv4 and IPv6 (from memory). */
const SPECIAL = new BlockList()
for (const [net, bits] of [
  ['0.0.0.0', 8],
  ['10.0.0.0', 8],
  ['100.64.0.0', 10],
  ['127.0.0.0', 8],
  ['169.254.0.0', 16],
  ['172.16.0.0', 12],
  ['192.0.0.0', 24],
  ['192.0.2.0', 24],
  ['192.88.99.0', 24],
  ['192.168.0.0', 16],
  ['198.18.0.0', 15],
  ['198.51.100.0', 24],
  ['203.0.113.0', 24],
  ['224.0.0.0', 4],
  ['240.0.0.0', 4],
] as const) {
  SPECIAL.addSubnet(net, bits, 'ipv4')
}
/** The part of IPv6 that is handed out, less what tunnels to other addresses or is for documents. */
const GLOBAL6 = new BlockList()
GLOBAL6.addSubnet('2000::', 3, 'ipv6')
const SPECIAL6 = new BlockList()
for (const [net, bits] of [
  ['2001::', 23],
  ['2001:db8::', 32],
  ['2002::', 16],
  ['3fff::', 20],
] as const) {
  SPECIAL6.addSubnet(net, bits, 'ipv6')
}

/** Whether an address, as text, belongs to a machine of the public internet. Text that is no address does not. */
export function isPublicAddress(address: string): boolean {
  switch (isIP(address)) {
    case 4:
      return !SPECIAL.check(address, 'ipv4')
    case 6:
      return GLOBAL6.check(address, 'ipv6') && !SPECIAL6.check(address, 'ipv6')
    default:
      return false
  }
}

/** Which network addresses webhooks may reach. */
import { BlockList, isIP } from 'node:net'

/**
 * Addresses that are nobody's on the public network: IANA's special-purpose registries (RFC 6890 and later) and multicast.
 * They hold this machine, its neighbours, and what hosting machines are told about themselves (169.254.169.254).
 */
const SPECIAL_V4 = [
  '0.0.0.0/8',
  '10.0.0.0/8',
  '100.64.0.0/10',
  '127.0.0.0/8',
  '169.254.0.0/16',
  '172.16.0.0/12',
  '192.0.0.0/24',
  '192.0.2.0/24',
  '192.88.99.0/24',
  '192.168.0.0/16',
  '198.18.0.0/15',
  '198.51.100.0/24',
  '203.0.113.0/24',
  '224.0.0.0/4',
  '240.0.0.0/4',
]
/** Only 2000::/3 is given out; of that, what leads back to IPv4 addresses or to nobody. */
const SPECIAL_V6 = ['2001::/23', '2001:db8::/32', '2002::/16', '3fff::/20']

const special = listOf([...SPECIAL_V4, ...SPECIAL_V6])
const given = listOf(['2000::/3'])

/** What the server's operator allows beside public addresses. */
export type PrivateAllowed = 'all' | BlockList

/** @param setting "allow", or networks such as "10.1.0.0/16, fd00::/8"; empty for none. @throws where it is neither */
export function readPrivateAllowed(setting: string): PrivateAllowed {
  if (setting.trim() === 'allow') return 'all'
  return listOf(
    setting
      .split(',')
      .map((part) => part.trim())
      .filter((part) => part !== ''),
  )
}

export function isReachable(address: string, allowed: PrivateAllowed): boolean {
  if (allowed === 'all') return true
  const plain = withoutMapping(address)
  if (isIP(plain) === 4) return !special.check(plain) || allowed.check(plain)
  if (isIP(plain) !== 6) return false
  const isPublic = given.check(plain, 'ipv6') && !special.check(plain, 'ipv6')
  return isPublic || allowed.check(plain, 'ipv6')
}

/** ::ffff:127.0.0.1 is 127.0.0.1, in either spelling; a zone of an interface is no part of an address. */
function withoutMapping(address: string): string {
  const bare = address.replace(/%.*$/, '')
  if (isIP(bare) !== 6) return bare
  // URL writes it the one way there is.
  const canonical = new URL(`http://[${bare}]/`).hostname.slice(1, -1)
  const mapped = /^::ffff:([0-9a-f]{1,4}):([0-9a-f]{1,4})$/.exec(canonical)
  if (!mapped) return canonical
  const [high, low] = [Number.parseInt(mapped[1] ?? '', 16), Number.parseInt(mapped[2] ?? '', 16)]
  return [high >> 8, high & 255, low >> 8, low & 255].join('.')
}

function listOf(networks: readonly string[]): BlockList {
  const list = new BlockList()
  for (const network of networks) {
    const [address = '', bits = ''] = network.split('/')
    const family = isIP(address)
    const most = family === 6 ? 128 : 32
    const prefix = bits === '' ? most : Number(bits)
    if (family === 0 || !Number.isInteger(prefix) || prefix < 0 || prefix > most)
      throw new Error(
        `Set THINSPAN_WEBHOOK_PRIVATE to "allow" or to networks such as 10.1.0.0/16; "${network}" is none.`,
      )
    list.addSubnet(address, prefix, family === 6 ? 'ipv6' : 'ipv4')
  }
  return list
}

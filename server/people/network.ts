import { isIP } from 'node:net'

/** Under what an address is counted: itself, of IPv6 its first 64 bits, as one subscriber has all the rest (RFC 6177). */
export function networkOf(address: string): string {
  const mapped = /^::ffff:(\d+\.\d+\.\d+\.\d+)$/i.exec(address)
  if (mapped !== null) return mapped[1]!
  if (isIP(address) !== 6) return address
  const [head = '', tail = ''] = address.split('%')[0]!.split('::')
  const groups = (text: string) => (text === '' ? [] : text.split(':'))
  const [left, right] = [groups(head), groups(tail)]
  const all = [...left, ...new Array<string>(Math.max(0, 8 - left.length - right.length)).fill('0'), ...right]
  return `${all
    .slice(0, 4)
    .map((g) => Number.parseInt(g, 16).toString(16))
    .join(':')}::/64`
}

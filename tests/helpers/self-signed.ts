import { generateKeyPairSync, sign } from 'node:crypto'

const tlv = (tag: number, ...parts: readonly Uint8Array[]): Buffer => {
  const body = Buffer.concat(parts)
  const length = body.length < 128 ? Buffer.from([body.length]) : Buffer.from([0x82, body.length >> 8, body.length & 255])
  return Buffer.concat([Buffer.from([tag]), length, body])
}
const sequence = (...parts: readonly Uint8Array[]) => tlv(0x30, ...parts)
const oid = (hex: string) => tlv(6, Buffer.from(hex, 'hex'))
const time = (text: string) => tlv(0x18, Buffer.from(text))

/** A certificate for localhost and 127.0.0.1 that signs itself, and its key, as PEM (RFC 5280 with ECDSA P-256; ASN.1 by hand as Node makes none). */
export function selfSigned(): { readonly cert: string; readonly key: string } {
  const { publicKey, privateKey } = generateKeyPairSync('ec', { namedCurve: 'P-256' })
  const algorithm = sequence(oid('2a8648ce3d040302'))
  const name = sequence(tlv(0x31, sequence(oid('550403'), tlv(0x0c, Buffer.from('localhost')))))
  const names = sequence(tlv(0x82, Buffer.from('localhost')), tlv(0x87, Buffer.from([127, 0, 0, 1])))
  const body = sequence(
    tlv(0xa0, tlv(2, Buffer.from([2]))),
    tlv(2, Buffer.from([1])),
    algorithm,
    name,
    sequence(time('20200101000000Z'), time('21200101000000Z')),
    name,
    publicKey.export({ type: 'spki', format: 'der' }),
    tlv(0xa3, sequence(sequence(oid('551d11'), tlv(4, names)))),
  )
  const signature = sign('sha256', body, privateKey)
  const der = sequence(body, algorithm, tlv(3, Buffer.from([0]), signature))
  const lines = der.toString('base64').replace(/.{64}/g, '$&\n')
  return {
    cert: `-----BEGIN CERTIFICATE-----\n${lines}\n-----END CERTIFICATE-----\n`,
    key: privateKey.export({ type: 'pkcs8', format: 'pem' }) as string,
  }
}

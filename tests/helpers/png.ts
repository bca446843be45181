import { deflateSync, inflateSync } from 'node:zlib'

/**
 * A screenshot in fewer bytes: 8-bit RGB(A) without interlace in, 256 colours by palette out (PNG third edition, clauses 7, 9 and 11).
 * The 256 most frequent colours stay exactly; the few others (edges of letters) become the nearest of them.
 */
export function smallPng(png: Buffer): Buffer {
  const width = png.readUInt32BE(16)
  const height = png.readUInt32BE(20)
  const channels = png[25] === 6 ? 4 : 3
  if (png[24] !== 8 || (png[25] !== 6 && png[25] !== 2) || png[28] !== 0) throw new Error('not an 8-bit RGB or RGBA picture')
  const packed: Buffer[] = []
  for (let at = 8; at < png.length; at += 12 + png.readUInt32BE(at))
    if (png.toString('latin1', at + 4, at + 8) === 'IDAT') packed.push(png.subarray(at + 8, at + 8 + png.readUInt32BE(at)))
  const pixels = unfiltered(inflateSync(Buffer.concat(packed)), width, height, channels)
  const indexed = indexedBy(pixels, width, height, channels)
  return Buffer.concat([
    png.subarray(0, 8),
    chunk('IHDR', Buffer.concat([png.subarray(16, 24), Buffer.from([8, 3, 0, 0, 0])])),
    chunk('PLTE', indexed.palette),
    chunk('IDAT', deflateSync(indexed.rows, { level: 9 })),
    chunk('IEND', Buffer.alloc(0)),
  ])
}

function unfiltered(raw: Buffer, width: number, height: number, channels: number): Buffer {
  const line = width * channels
  const out = Buffer.alloc(line * height)
  for (let y = 0; y < height; y++) {
    const kind = raw[y * (line + 1)]
    for (let i = 0; i < line; i++) {
      const left = i >= channels ? out[y * line + i - channels]! : 0
      const up = y > 0 ? out[(y - 1) * line + i]! : 0
      const corner = y > 0 && i >= channels ? out[(y - 1) * line + i - channels]! : 0
      const guess = kind === 1 ? left : kind === 2 ? up : kind === 3 ? (left + up) >> 1 : kind === 4 ? paeth(left, up, corner) : 0
      out[y * line + i] = raw[y * (line + 1) + 1 + i]! + guess
    }
  }
  return out
}

function paeth(a: number, b: number, c: number): number {
  const [pa, pb, pc] = [Math.abs(b - c), Math.abs(a - c), Math.abs(a + b - 2 * c)]
  return pa <= pb && pa <= pc ? a : pb <= pc ? b : c
}

function indexedBy(pixels: Buffer, width: number, height: number, channels: number): { palette: Buffer; rows: Buffer } {
  const often = new Map<number, number>()
  const keyAt = (at: number) => (pixels[at]! << 16) | (pixels[at + 1]! << 8) | pixels[at + 2]!
  for (let at = 0; at < pixels.length; at += channels) often.set(keyAt(at), (often.get(keyAt(at)) ?? 0) + 1)
  const palette = [...often]
    .sort((a, b) => b[1] - a[1])
    .slice(0, 256)
    .map(([key]) => [key >> 16, (key >> 8) & 255, key & 255] as const)
  const nearest = (key: number): number => {
    const distance = (c: readonly [number, number, number]) =>
      (c[0] - (key >> 16)) ** 2 + (c[1] - ((key >> 8) & 255)) ** 2 + (c[2] - (key & 255)) ** 2
    let best = 0
    for (const [i, c] of palette.entries()) if (distance(c) < distance(palette[best]!)) best = i
    return best
  }
  const index = new Map([...often.keys()].map((key) => [key, nearest(key)]))
  const rows = Buffer.alloc((width + 1) * height)
  for (let y = 0; y < height; y++)
    for (let x = 0; x < width; x++) rows[y * (width + 1) + 1 + x] = index.get(keyAt((y * width + x) * channels))!
  return { palette: Buffer.from(palette.flat()), rows }
}

const table = Array.from({ length: 256 }, (_, n) => {
  let c = n
  for (let k = 0; k < 8; k++) c = c & 1 ? 0xedb88320 ^ (c >>> 1) : c >>> 1
  return c >>> 0
})
function chunk(type: string, body: Buffer): Buffer {
  const named = Buffer.concat([Buffer.from(type, 'latin1'), body])
  let crc = 0xffffffff
  for (const byte of named) crc = table[(crc ^ byte) & 0xff]! ^ (crc >>> 8)
  const out = Buffer.alloc(named.length + 8)
  out.writeUInt32BE(body.length, 0)
  named.copy(out, 4)
  out.writeUInt32BE((crc ^ 0xffffffff) >>> 0, named.length + 4)
  return out
}

import { deflateSync } from 'node:zlib'

export type Rgba = readonly [number, number, number, number]

const SIGNATURE = Buffer.from([0x89, 0x50, 0x4e, 0x47, 0x0d, 0x0a, 0x1a, 0x0a])

/** CRC-32 as PNG asks for it (ISO 3309, polynomial EDB88320 reflected); zlib offers its own only in newer Node. */
function crc32(data: Buffer): number {
  let crc = 0xffffffff
  for (const byte of data) {
    crc ^= byte
    for (let bit = 0; bit < 8; bit++) crc = crc & 1 ? (crc >>> 1) ^ 0xedb88320 : crc >>> 1
  }
  return (crc ^ 0xffffffff) >>> 0
}

function chunk(type: string, data: Buffer): Buffer {
  const body = Buffer.concat([Buffer.from(type, 'latin1'), data])
  const length = Buffer.alloc(4)
  length.writeUInt32BE(data.length)
  const check = Buffer.alloc(4)
  check.writeUInt32BE(crc32(body))
  return Buffer.concat([length, body, check])
}

/**
 * A picture as a PNG file: 8 bits a channel with alpha, no filter. `at` gives the colour of a pixel's column and row.
 * @source PNG specification (W3C), chunks IHDR, IDAT, IEND
 */
export function encodePng(width: number, height: number, at: (x: number, y: number) => Rgba): Buffer {
  const raw = Buffer.alloc(height * (1 + 4 * width))
  for (let y = 0; y < height; y++) {
    for (let x = 0; x < width; x++) raw.set(at(x, y), y * (1 + 4 * width) + 1 + 4 * x)
  }
  const header = Buffer.alloc(13)
  header.writeUInt32BE(width, 0)
  header.writeUInt32BE(height, 4)
  header.set([8, 6, 0, 0, 0], 8)
  return Buffer.concat([
    SIGNATURE,
    chunk('IHDR', header),
    chunk('IDAT', deflateSync(raw)),
    chunk('IEND', Buffer.alloc(0)),
  ])
}

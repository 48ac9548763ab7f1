import { inflateSync } from 'node:zlib'
import { expect, it } from 'vitest'
import { GLASS_SCALE, GLASS_SIZE, glassPng } from '@/lib/server/mail/digest/glass'
import { encodePng } from '@/lib/server/mail/png'

/** Reads back what the PNG specification says of a file without filters: chunks, size, pixels. */
function decode(png: Buffer) {
  expect(png.subarray(0, 8).toString('hex')).toBe('89504e470d0a1a0a')
  const chunks = new Map<string, Buffer>()
  for (let at = 8; at < png.length; ) {
    const length = png.readUInt32BE(at)
    chunks.set(png.toString('latin1', at + 4, at + 8), png.subarray(at + 8, at + 8 + length))
    at += 12 + length
  }
  expect([...chunks.keys()]).toEqual(['IHDR', 'IDAT', 'IEND'])
  const header = chunks.get('IHDR')!
  const width = header.readUInt32BE(0)
  const height = header.readUInt32BE(4)
  const raw = inflateSync(chunks.get('IDAT')!)
  expect(raw.length).toBe(height * (1 + 4 * width))
  const at = (x: number, y: number) => [
    ...raw.subarray(y * (1 + 4 * width) + 1 + 4 * x, y * (1 + 4 * width) + 5 + 4 * x),
  ]
  return { width, height, at }
}

it('writes the chunk checks that the specification asks for', () => {
  // the empty IEND chunk is the same in every PNG: its CRC is AE 42 60 82 (PNG specification)
  expect(
    encodePng(1, 1, () => [1, 2, 3, 4])
      .subarray(-12)
      .toString('hex'),
  ).toBe('0000000049454e44ae426082')
})

it('keeps every pixel', () => {
  const { at } = decode(encodePng(3, 2, (x, y) => [x, y, 7, 255]))
  expect(at(0, 0)).toEqual([0, 0, 7, 255])
  expect(at(2, 1)).toEqual([2, 1, 7, 255])
})

const middle = (GLASS_SIZE.width * GLASS_SCALE) / 2
const rowAt = (level: number) => Math.round(GLASS_SIZE.height * GLASS_SCALE * (1 - level / 1.5))

it('fills the glass up to its level and no further', () => {
  const glass = decode(glassPng(0.5))
  expect([glass.width, glass.height]).toEqual([GLASS_SIZE.width * 2, GLASS_SIZE.height * 2])
  expect(glass.at(middle, rowAt(0.4))).toEqual([0x0e, 0x6b, 0x74, 255])
  expect(glass.at(middle, rowAt(0.6))[3]).toBe(0)
})

it('draws what stands over the limit in another colour, and the limit line in every glass', () => {
  const over = decode(glassPng(1.4))
  const colours = new Set(
    Array.from({ length: 20 }, (_, i) =>
      over
        .at(middle - 10 + i, rowAt(1.2))
        .slice(0, 3)
        .join(),
    ),
  )
  expect(colours.has([0x9b, 0x3b, 0x26].join())).toBe(true)
  for (const level of [0, 0.5, 1.4, null])
    expect(decode(glassPng(level)).at(2, rowAt(1))[3]).toBeGreaterThan(100)
})

it('is empty where nothing was heard', () => {
  expect(decode(glassPng(null)).at(middle, rowAt(0.1))[3]).toBe(0)
})

import fs from 'node:fs'
import { describe, expect, test } from 'vitest'
import { themeOf } from '@/lib/format/theme'

const css = fs.readFileSync('app/globals.css', 'utf8').replaceAll('"', "'")

/** The custom properties of the block that begins with this selector. */
function tokensAfter(selector: string): Record<string, string> {
  const from = css.indexOf(selector)
  expect(from, selector).toBeGreaterThanOrEqual(0)
  const block = css.slice(from, css.indexOf('}', from))
  return Object.fromEntries(
    [...block.matchAll(/--([\w-]+):\s*([^;]+);/g)].map((match) => [match[1] as string, match[2] as string]),
  )
}

const light = tokensAfter(':root {')
const bySystem = tokensAfter(":root:not([data-theme='light']) {")
const byChoice = tokensAfter("\n:root[data-theme='dark'] {")

/** Relative luminance and contrast of WCAG 2.2 (definitions in its glossary). */
function luminance(hex: string): number {
  const [r, g, b] = [1, 3, 5].map((at) => {
    const channel = Number.parseInt(hex.slice(at, at + 2), 16) / 255
    return channel <= 0.04045 ? channel / 12.92 : ((channel + 0.055) / 1.055) ** 2.4
  })
  return 0.2126 * r! + 0.7152 * g! + 0.0722 * b!
}
function contrast(a: string, b: string): number {
  const [high, low] = [luminance(a), luminance(b)].sort((x, y) => y - x) as [number, number]
  return (high + 0.05) / (low + 0.05)
}

test('dark is the same whether the system or the reader asked for it', () => {
  expect(byChoice).toEqual(bySystem)
  expect(Object.keys(byChoice).length).toBeGreaterThan(20)
})

describe.each([
  ['light', light],
  ['dark', { ...light, ...byChoice }],
])('%s', (_, tokens) => {
  const text = ['ink', 'ink-2', 'ink-3', 'tide-ink', 'reed-ink', 'shoal-ink', 'silt-ink', 'fog-ink']
  test.each(text)('%s is readable on paper and leaf (4.5)', (name) => {
    for (const ground of ['paper', 'leaf'])
      expect(contrast(tokens[name]!, tokens[ground]!)).toBeGreaterThanOrEqual(4.5)
  })
  test.each(['tide', 'reed', 'shoal', 'silt', 'fog', 'edge', 'focus', 'deep'])(
    '%s can be seen on paper (3)',
    (name) => {
      expect(contrast(tokens[name]!, tokens.paper!)).toBeGreaterThanOrEqual(3)
    },
  )
  test('the main button is readable', () => {
    expect(contrast(tokens['on-deep']!, tokens.deep!)).toBeGreaterThanOrEqual(4.5)
  })
})

test('a cookie names a theme or nothing', () => {
  expect([themeOf('dark'), themeOf('light'), themeOf('x'), themeOf(undefined)]).toEqual([
    'dark',
    'light',
    null,
    null,
  ])
})

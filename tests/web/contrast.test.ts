import { readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { describe, expect, it } from 'vitest'
import { minimum, pairs } from './contrast-pairs.ts'

const web = fileURLToPath(new URL('../../web', import.meta.url))
const tokens = readFileSync(join(web, 'styles/tokens.css'), 'utf8')

function coloursOf(theme: string): Record<string, string> {
  const from = tokens.indexOf(`[data-theme="${theme}"]`)
  const block = tokens.slice(from, tokens.indexOf('\n}', from))
  return Object.fromEntries([...block.matchAll(/--([\w-]+):\s*(#[0-9a-f]{6})/gi)].map((m) => [m[1]!, m[2]!]))
}

/** Relative luminance of sRGB and contrast ratio: WCAG 2.2, definitions "relative luminance" and "contrast ratio". */
function luminance(hex: string): number {
  const [r, g, b] = [1, 3, 5].map((i) => {
    const v = Number.parseInt(hex.slice(i, i + 2), 16) / 255
    return v <= 0.04045 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4
  }) as [number, number, number]
  return 0.2126 * r + 0.7152 * g + 0.0722 * b
}
function contrast(a: string, b: string): number {
  const [hi, lo] = [luminance(a), luminance(b)].sort((x, y) => y - x) as [number, number]
  return (hi + 0.05) / (lo + 0.05)
}
const files = (dir: string): string[] =>
  readdirSync(dir, { withFileTypes: true }).flatMap((e) => (e.isDirectory() ? files(join(dir, e.name)) : [join(dir, e.name)]))

it('computes the contrast of WCAG: black on white is 21, #767676 on white 4.54', () => {
  expect(contrast('#000000', '#ffffff')).toBeCloseTo(21, 6)
  expect(contrast('#767676', '#ffffff')).toBeCloseTo(4.54, 2)
})

describe.each(['day', 'night'])('%s', (theme) => {
  const colour = coloursOf(theme)
  it.each(pairs)('%s on %s meets its minimum as %s: %s', (front, ground, kind) => {
    expect(contrast(colour[front]!, colour[ground]!)).toBeGreaterThanOrEqual(minimum[kind])
  })
  it('leaves no colour of the theme out of the list', () => {
    const used = new Set([...pairs.map((p) => p[0]), ...pairs.map((p) => p[1])])
    expect(Object.keys(colour).filter((name) => !used.has(name))).toEqual([])
  })
})

it('writes no colour anywhere but in tokens.css', () => {
  const literal = /#(?:[0-9a-f]{6}|[0-9a-f]{3})\b(?!['"]?\s*\)|\w)|\brgba?\(|\bhsla?\(/gi
  const found = files(web)
    .filter((f) => /\.(css|ts|html)$/.test(f) && !f.endsWith('tokens.css'))
    .flatMap((f) => [...readFileSync(f, 'utf8').matchAll(literal)].map((m) => `${f.slice(web.length + 1)}: ${m[0]}`))
  expect(found).toEqual([])
})

it('shows no text below 17 px at the design size of 1920 pixels', () => {
  const sizes = [...tokens.matchAll(/--t-[\w-]+:\s*([\d.]+)rem/g)].map((m) => 16 * Number(m[1]))
  expect(Math.min(...sizes.filter((s) => s > 0))).toBe(17)
})

import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import { expect, test } from 'vitest'
import { rootFolder } from './root.js'

type Theme = 'light' | 'dark'

const css = readFileSync(join(rootFolder(), 'client', 'style', 'tokens.css'), 'utf8')
const tokensIn = (block: string): Readonly<Record<string, string>> =>
  Object.fromEntries(
    [...block.matchAll(/--([\w-]+):\s*(#[0-9a-f]{6});/gi)].map((m) => [m[1] ?? '', m[2] ?? '']),
  )
const blockOf = (selector: string): string => {
  const from = css.indexOf(`${selector} {`)
  return css.slice(from, css.indexOf('\n}', from))
}
const light = tokensIn(blockOf(':root'))
const themes: Readonly<Record<Theme, Readonly<Record<string, string>>>> = {
  light,
  dark: { ...light, ...tokensIn(blockOf(":root[data-theme='dark']")) },
}

/** Relative luminance (WCAG 2.2, "relative luminance"). */
const luminance = (hex: string): number => {
  const [r = 0, g = 0, b = 0] = [1, 3, 5].map((at) => {
    const c = Number.parseInt(hex.slice(at, at + 2), 16) / 255
    return c <= 0.04045 ? c / 12.92 : ((c + 0.055) / 1.055) ** 2.4
  })
  return 0.2126 * r + 0.7152 * g + 0.0722 * b
}

/** Contrast ratio (WCAG 2.2, "contrast ratio"). */
const contrast = (theme: Theme, one: string, other: string): number => {
  const [a, b] = [one, other].map((name) => {
    const hex = themes[theme][name]
    if (hex === undefined) throw new Error(`tokens.css has no --${name}`)
    return luminance(hex)
  }) as [number, number]
  return (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05)
}

/** Success criterion 1.4.3: text. */
const text = 4.5
/** Success criterion 1.4.11: graphics that carry meaning. */
const graphics = 3

const pairs: readonly (readonly [string, string, number])[] = [
  ['ink', 'sheet', text],
  ['ink', 'paper', text],
  ['ink', 'well', text],
  ['ink', 'land', text],
  ['ink-2', 'sheet', text],
  ['ink-2', 'paper', text],
  ['ink-2', 'land', text],
  ['ink-2', 'well', text],
  ['ink-3', 'sheet', text],
  ['ink', 'air', text],
  ['ink', 'd1', text],
  ['ink', 'd2', text],
  ['ink', 'd3', text],
  ['ink', 'd4', text],
  ['ink-2', 'air', text],
  ['red', 'sheet', text],
  ['on-red', 'red', text],
  ['ink', 'red-wash', text],
  ['blue', 'blue-wash', text],
  ['ink', 'blue-wash', text],
  ['green', 'sheet', text],
  ['mag', 'sheet', text],
  ['yellow-text', 'yellow-wash', text],
  ['sheet', 'ink', text],
  ['mag', 'air', graphics],
  ['mag', 'd1', graphics],
  ['mag', 'd2', graphics],
  ['mag', 'd3', graphics],
  ['mag', 'd4', graphics],
  ['rule', 'sheet', graphics],
  ['isobath', 'd1', graphics],
  ['isobath', 'd4', graphics],
  ['silent', 'sheet', graphics],
  ['focus', 'paper', graphics],
  ['focus', 'focus-gap', graphics],
  // Red on the deepest water and yellow on white are less than 3: hence every mark's edge and halo.
  ['edge', 'halo', graphics],
]

test.each(
  (['light', 'dark'] as const).flatMap((theme) => pairs.map((p) => [theme, ...p] as const)),
)('%s: %s on %s has at least %d to 1', (theme, one, other, least) => {
  expect(contrast(theme, one, other)).toBeGreaterThanOrEqual(least)
})

test('an edge on its halo has the 16 to 1 that the marks rest on', () => {
  expect(contrast('light', 'edge', 'halo')).toBeGreaterThan(16)
})

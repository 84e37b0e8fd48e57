import type { Token } from './shapes.js'

const names = [
  'paper',
  'sheet',
  'land',
  'ink',
  'ink-2',
  'ink-3',
  'hair',
  'rule',
  'air',
  'd1',
  'd2',
  'd3',
  'd4',
  'isobath',
  'red',
  'yellow',
  'on-red',
  'mag',
  'mag-2',
  'silent',
  'calm',
  'edge',
  'halo',
  'ice',
  'stripe-a',
] as const satisfies readonly (Token | string)[]

/** The colours in force, as a canvas needs them: it cannot follow a stylesheet by itself. */
export type Colours = Readonly<Record<(typeof names)[number], string>> & { readonly font: string }

export const readColours = (): Colours => {
  const style = getComputedStyle(document.documentElement)
  const entries = names.map((name) => [name, style.getPropertyValue(`--${name}`).trim()])
  // The cast: one entry for each of `names`, read just above.
  return {
    ...Object.fromEntries(entries),
    font: style.getPropertyValue('--font').trim(),
  } as Colours
}

/** A colour made see-through; tokens are six-digit hex. */
export const faded = (colour: string, alpha: number): string =>
  `${colour}${Math.round(alpha * 255)
    .toString(16)
    .padStart(2, '0')}`

import type { EvidenceKind, MarkKind } from '../shown.js'

/** Names of colours in tokens.css, without the dashes. */
export type Token =
  | 'sheet'
  | 'ink'
  | 'ink-2'
  | 'calm'
  | 'edge'
  | 'halo'
  | 'yellow'
  | 'red'
  | 'on-red'
  | 'silent'
  | 'mag'

/** One stroke of the pen about 0,0. The same strings draw the SVG marks and the canvas. */
export type Part = {
  readonly d: string
  readonly fill?: Token
  readonly stroke?: Token
  readonly width?: number
  readonly dash?: readonly [number, number]
}

export type Shape = { readonly halo: string; readonly parts: readonly Part[] }

const circle = (r: number): string => `M${-r} 0A${r} ${r} 0 1 1 ${r} 0A${r} ${r} 0 1 1 ${-r} 0Z`
const diamond = (r: number): string => `M0 ${-r}L${r} 0L0 ${r}L${-r} 0Z`
const square = (r: number): string => `M${-r} ${-r}H${r}V${r}H${-r}Z`
const hexagon = (r: number): string =>
  `M${[0, 1, 2, 3, 4, 5]
    .map((i) => {
      const a = (i * Math.PI) / 3
      return `${(r * Math.sin(a)).toFixed(2)} ${(-r * Math.cos(a)).toFixed(2)}`
    })
    .join('L')}Z`

/** Six arms of an ice crystal, each with its two barbs. */
const crystal = (r: number): string =>
  [0, 60, 120, 180, 240, 300]
    .map((degrees) => {
      const a = (degrees * Math.PI) / 180
      const at = (x: number, y: number) =>
        `${(x * Math.cos(a) - y * Math.sin(a)).toFixed(2)} ${(x * Math.sin(a) + y * Math.cos(a)).toFixed(2)}`
      return `M0 0L${at(0, -r)}M${at(-r * 0.38, -r * 0.86)}L${at(0, -r * 0.5)}L${at(r * 0.38, -r * 0.86)}`
    })
    .join('')

const lowerHalf = 'M-7.4 0A7.4 7.4 0 0 0 7.4 0Z'
const ownLine = 'M-10.5 0H10.5'

const near = (fill: Token, edge: Token): Shape => ({
  halo: circle(10),
  parts: [
    { d: circle(7.4), fill: 'sheet', stroke: edge, width: 1.6 },
    { d: lowerHalf, fill, stroke: edge, width: 1.6 },
    { d: ownLine, stroke: edge, width: 1.6 },
  ],
})

/** Standings, in a 26 × 26 box. Six shapes; hollow and grey where stock is as intended. */
export const shapes: Readonly<Record<MarkKind, Shape>> = {
  above: {
    halo: circle(8.6),
    parts: [{ d: circle(6), fill: 'sheet', stroke: 'calm', width: 2.4 }],
  },
  near: near('yellow', 'edge'),
  nearCalm: near('calm', 'calm'),
  below: {
    halo: diamond(11.6),
    parts: [{ d: diamond(8.6), fill: 'yellow', stroke: 'edge', width: 1.7 }],
  },
  poised: {
    halo: 'M-13.6 -9.8H13.6L0 14.4Z',
    parts: [
      { d: 'M-9.6 -7.4H9.6L0 9.6Z', fill: 'red', stroke: 'edge', width: 1.7 },
      { d: 'M0 -4.6V1.2M0 3.6V4', stroke: 'on-red', width: 2.2 },
    ],
  },
  turned: {
    halo: hexagon(14.4),
    parts: [
      { d: hexagon(11.4), fill: 'red', stroke: 'edge', width: 1.7 },
      { d: crystal(7.4), stroke: 'on-red', width: 1.7 },
    ],
  },
  silent: {
    halo: square(9.6),
    parts: [
      { d: square(7.4), fill: 'sheet', stroke: 'silent', width: 2, dash: [3.4, 2.3] },
      {
        d: 'M-2.7 -2.2C-2.7 -5.6 2.7 -5.6 2.7 -2.4C2.7 -0.3 0 -0.5 0 1.7M0 4.3V4.5',
        stroke: 'silent',
        width: 2,
      },
    ],
  },
  intendedNear: near('sheet', 'calm'),
  intendedBelow: {
    halo: diamond(10),
    parts: [{ d: diamond(7.4), fill: 'sheet', stroke: 'calm', width: 2 }],
  },
  intendedTurned: {
    halo: hexagon(11),
    parts: [
      { d: hexagon(8.6), fill: 'sheet', stroke: 'calm', width: 1.8 },
      { d: crystal(5.2), stroke: 'calm', width: 1.2 },
    ],
  },
}

const box = 'M-5.5 -5.5H5.5V5.5H-5.5Z'
const inferred = 'mag'

/** What a claim rests on, in a 14 × 14 box. */
export const evidenceShapes: Readonly<Record<EvidenceKind, readonly Part[]>> = {
  item: [{ d: box, fill: 'ink', stroke: 'ink', width: 1.5 }],
  // A wall reading is a measurement, but half outside the item: the square is filled to its middle.
  wall: [
    { d: box, stroke: 'ink', width: 1.6 },
    { d: 'M-5.5 -5.5H0V5.5H-5.5Z', fill: 'ink' },
  ],
  witness: [
    { d: box, stroke: 'ink', width: 1.6 },
    { d: 'M-2.4 -2.4H2.4V2.4H-2.4Z', fill: 'ink' },
  ],
  air: [
    { d: box, stroke: inferred, width: 1.6 },
    { d: 'M-5 1L1 -5M-5 5L5 -5M-1 5L5 -1', stroke: inferred, width: 1.4 },
  ],
  neighbour: [
    { d: box, stroke: inferred, width: 1.7, dash: [2, 2] },
    { d: circle(1.6), fill: inferred },
  ],
  none: [
    { d: box, stroke: 'ink-2', width: 1.4 },
    { d: 'M-4 -4L4 4M4 -4L-4 4', stroke: 'ink-2', width: 1.6 },
  ],
}

import type { ItemView } from '../../config/schema/api.js'
import type { Layout } from './lanes.js'
import type { Colours } from './tokens.js'

/** The band of margins that is drawn to scale, K; what lies beyond is pinned to the edge. */
export const scale_K = { top: 6.4, bottom: -9.2 } as const

/** Room around the lanes, px at scale 1. */
export const edges = { left: 54, right: 10, head: 56, foot: 44 } as const

/** Everything that one drawing of the Waterline needs; it asks nobody else. */
export type Scene = {
  readonly layout: Layout
  readonly colours: Colours
  /** Larger type and marks: 1 at a desk, 1.42 on a wall. */
  readonly size: number
  readonly asOf_ms: number
  readonly now_ms: number
  readonly zone: string
  readonly stale: boolean
  readonly practice: boolean
  /** Item under the pointer or the keyboard. */
  readonly near: string | null
  /** Where a mark stands now, K: it may be on its way to its margin. */
  margin(item: ItemView): number | null
  say(key: string, values?: Readonly<Record<string, string | number>>): string
}

/** The pen and the two scales. */
export type Board = {
  readonly ctx: CanvasRenderingContext2D
  readonly width: number
  readonly height: number
  readonly top: number
  readonly bottom: number
  readonly left: number
  readonly right: number
  /** px of a place along the lanes. */
  x(along: number): number
  /** px of a margin, held within the drawn band. */
  y(margin_K: number): number
}

export const setFont = (
  { ctx }: Board,
  { colours, size }: Scene,
  px: number,
  weight = 400,
): void => {
  ctx.font = `${weight} ${Math.round(px * size)}px ${colours.font}`
}

/** Text that is cut with an ellipsis where it does not fit; nothing where not even that fits. */
export const fitted = (ctx: CanvasRenderingContext2D, text: string, room: number): string => {
  if (ctx.measureText(text).width <= room) return text
  for (let n = text.length - 1; n > 1; n -= 1) {
    const cut = `${text.slice(0, n).trimEnd()}…`
    if (ctx.measureText(cut).width <= room) return cut
  }
  return ''
}

/** Text on its own halo, so that it can be read over lines and tints. */
export const haloText = (
  ctx: CanvasRenderingContext2D,
  text: string,
  x: number,
  y: number,
  fill: string,
  halo: string,
  width = 3.5,
): void => {
  ctx.lineJoin = 'round'
  ctx.lineWidth = width
  ctx.strokeStyle = halo
  ctx.strokeText(text, x, y)
  ctx.fillStyle = fill
  ctx.fillText(text, x, y)
}

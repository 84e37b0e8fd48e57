import { isAsIntended, needsRoom } from '../shown.js'
import type { Bay, Lane } from './lanes.js'
import { blindPattern } from './pen.js'
import { type Board, haloText, type Scene, scale_K, setFont } from './scene.js'

const tints = ['d1', 'd2', 'd3', 'd4'] as const

/** Where a lane's water changes its tint, from the line downwards. */
const levelsOf = (lane: Lane): readonly number[] => {
  const [one, ten, fifty] = lane.item.tints_K
  const at = (k: number | null) => Math.max(scale_K.bottom, k ?? scale_K.bottom)
  return [0, at(one), at(ten), at(fifty), scale_K.bottom]
}

const isTinted = (lane: Lane): boolean => lane.mark !== 'silent' && !isAsIntended(lane.item)

/** Air above the line, tints under it as steps: each lane has its own depths. */
export const drawWater = (board: Board, scene: Scene, bay: Bay): void => {
  const { ctx } = board
  const { colours } = scene
  const line = board.y(0)
  ctx.fillStyle = colours.air
  ctx.fillRect(board.x(bay.x), board.top, bay.w, line - board.top)
  for (const part of bay.parts) {
    const x = board.x(part.x)
    if (part.kind === 'lane' && part.mark === 'silent') {
      ctx.fillStyle = colours.sheet
      ctx.fillRect(x, board.top, part.w, board.bottom - board.top)
      ctx.fillStyle = blindPattern(ctx, colours)
      ctx.fillRect(x, board.top, part.w, board.bottom - board.top)
      continue
    }
    // From old figures no chance is reckoned: the water is plain then.
    if (part.kind === 'fold' || scene.stale || !isTinted(part)) {
      ctx.fillStyle = colours.d1
      ctx.fillRect(x - 0.3, line, part.w + 0.6, board.bottom - line)
      continue
    }
    const levels = levelsOf(part)
    for (const [i, tint] of tints.entries()) {
      const from = board.y(levels[i] ?? 0)
      const to = board.y(levels[i + 1] ?? scale_K.bottom)
      if (to <= from) continue
      ctx.fillStyle = colours[tint]
      ctx.fillRect(x - 0.3, from, part.w + 0.6, to - from)
    }
  }
}

/** The edges of the tints: 1, 10 and 50 %, the middle one heavy; never smoothed between items. */
export const drawIsobaths = (board: Board, scene: Scene, bay: Bay): void => {
  if (scene.stale) return
  const { ctx } = board
  ctx.strokeStyle = scene.colours.isobath
  ctx.setLineDash([])
  for (const which of [0, 1, 2] as const) {
    ctx.beginPath()
    let down = false
    for (const part of bay.parts) {
      const depth = part.kind === 'lane' && isTinted(part) ? part.item.tints_K[which] : null
      if (depth === null || depth <= scale_K.bottom) {
        down = false
        continue
      }
      const y = board.y(depth)
      if (down) ctx.lineTo(board.x(part.x), y)
      else ctx.moveTo(board.x(part.x), y)
      ctx.lineTo(board.x(part.x + part.w), y)
      down = true
    }
    ctx.lineWidth = which === 1 ? 1.8 : 0.9
    ctx.stroke()
  }
}

/** The line: 2 px with its thin echo below. It is the same everywhere. */
export const drawLine = (board: Board, scene: Scene): void => {
  const { ctx } = board
  const { size, colours } = scene
  const y = board.y(0)
  ctx.fillStyle = colours.ink
  ctx.fillRect(board.left - 9 * size, y - size, board.right - board.left + 9 * size, 2 * size)
  ctx.fillRect(
    board.left - 9 * size,
    y + 3.4 * size,
    board.right - board.left + 9 * size,
    0.8 * size,
  )
}

/** The first calm run wide enough for a label that no mark stands in: its left end and first lane. */
const freeRun = (
  board: Board,
  scene: Scene,
  width: number,
  also: (lane: Lane) => boolean = () => true,
): { x: number; lane: Lane } | null => {
  for (const bay of scene.layout.bays) {
    let from: { x: number; lane: Lane } | null = null
    for (const part of bay.parts) {
      const x = board.x(part.x)
      const margin = part.kind === 'lane' ? scene.margin(part.item) : null
      const inTheWay = part.kind === 'fold' || needsRoom(part.mark) || x < board.left - 1
      if (inTheWay || margin === null || margin < 1.2) from = null
      else if (!also(part)) from = null
      else from ??= { x, lane: part }
      if (from !== null && x + part.w - from.x >= width) return from
    }
  }
  return null
}

/** The first lane in sight that is so. */
const firstSeen = (
  board: Board,
  scene: Scene,
  is: (lane: Lane) => boolean,
): { x: number; lane: Lane } | null => {
  const lane = scene.layout.bays
    .flatMap((bay) => bay.parts)
    .find((p): p is Lane => p.kind === 'lane' && board.x(p.x) >= board.left - 1 && is(p))
  return lane === undefined ? null : { x: board.x(lane.x), lane }
}

/** What the line and the isobaths are called, once, over calm lanes near the left. */
export const drawLineLabels = (board: Board, scene: Scene): void => {
  const { ctx } = board
  const { colours, size } = scene
  setFont(board, scene, 12, 650)
  ctx.textAlign = 'left'
  ctx.textBaseline = 'alphabetic'
  const name = scene.say('waterline.line')
  const width = ctx.measureText(name).width + 10
  const quiet = (lane: Lane) => lane.item.forecast.every(([, , middle]) => middle > 1.2)
  const at = (freeRun(board, scene, width, quiet) ?? freeRun(board, scene, width))?.x ?? null
  if (at !== null) haloText(ctx, name, at + 6, board.y(0) - 8 * size, colours.ink, colours.air)
  const isMarked = (l: Lane) => isTinted(l) && l.item.tints_K[1] !== null
  // Where everything needs room: a lane whose mark is clear of its tints.
  const isClear = (l: Lane) =>
    isMarked(l) && (scene.margin(l.item) ?? 0) > (l.item.tints_K[0] ?? 0) + 1.2
  const run = freeRun(board, scene, 34 * size, isMarked) ?? firstSeen(board, scene, isClear)
  if (run === null || scene.stale) return
  let above = Number.NEGATIVE_INFINITY
  for (const [i, text] of ['1 %', '10 %', '50 %'].entries()) {
    const depth = run.lane.item.tints_K[i]
    if (depth === null || depth === undefined || depth <= scale_K.bottom) continue
    const y = Math.max(board.y(depth) - 3, above + 12 * size)
    above = y
    const tint = colours[tints[i] ?? 'd1']
    haloText(ctx, text, run.x + 4, y, colours.ink, tint, 2.5)
  }
}

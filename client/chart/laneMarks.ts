import {
  evidenceOf,
  isAsIntended,
  isInferred,
  marginU_K,
  needsRoom,
  turnedDepth_K,
} from '../shown.js'
import type { Fold, Lane } from './lanes.js'
import { drawChevron, drawMark, icePattern } from './pen.js'
import { type Board, type Scene, scale_K } from './scene.js'
import { faded } from './tokens.js'

const hour_ms = 3_600_000
/** The share of a lane that a track or a forecast takes on its side of the mark. */
const reach = 0.44

const clipTo = (board: Board, left: number, right: number): void => {
  board.ctx.beginPath()
  board.ctx.rect(left, board.top, right - left, board.bottom - board.top)
  board.ctx.clip()
}

/** The last hour, left of the mark. */
const drawTrack = (board: Board, scene: Scene, lane: Lane): void => {
  const { ctx } = board
  const { colours, size } = scene
  const middle = board.x(lane.x + lane.w / 2)
  const inferred = isInferred(evidenceOf(lane.item.verdict.evidence))
  ctx.beginPath()
  let down = false
  for (const [t_ms, margin_K] of lane.item.track) {
    const back = (t_ms - scene.asOf_ms) / hour_ms
    if (back < -1 || back > 0) continue
    const x = middle + back * lane.w * reach
    if (down) ctx.lineTo(x, board.y(margin_K))
    else ctx.moveTo(x, board.y(margin_K))
    down = true
  }
  ctx.setLineDash([])
  ctx.lineJoin = 'round'
  ctx.lineWidth = 1.4 * size
  ctx.strokeStyle = inferred ? faded(colours.mag, 0.55) : faded(colours['ink-2'], 0.75)
  ctx.stroke()
}

/** The next half hour, right of the mark; a stale page forecasts nothing. */
const drawForecast = (board: Board, scene: Scene, lane: Lane): void => {
  const { ctx } = board
  const { colours, size } = scene
  const fan = lane.item.forecast
  const reaches = fan.some(([, , middle]) => middle < 0)
  const wanted = needsRoom(lane.mark) || reaches
  if (scene.stale || lane.mark === 'turned' || isAsIntended(lane.item) || !wanted) return
  const middle = board.x(lane.x + lane.w / 2)
  ctx.beginPath()
  let down = false
  for (const [t_ms, , margin_K] of fan) {
    const ahead = (t_ms - scene.asOf_ms) / (hour_ms / 2)
    if (ahead < -0.05 || ahead > 1.02) continue
    const x = middle + Math.max(0, ahead) * lane.w * reach
    if (down) ctx.lineTo(x, board.y(margin_K))
    else ctx.moveTo(x, board.y(margin_K))
    down = true
  }
  ctx.setLineDash([4 * size, 3 * size])
  ctx.lineWidth = 2 * size
  ctx.strokeStyle = colours.mag
  ctx.stroke()
  ctx.setLineDash([])
}

/** From the depth at which it turned up to the line. It stays as long as "has been frozen" stands. */
const drawIceColumn = (board: Board, scene: Scene, lane: Lane): void => {
  const depth = turnedDepth_K(lane.item)
  if (lane.mark !== 'turned' || depth === null) return
  const { ctx } = board
  const { colours, size } = scene
  const width = Math.min(22 * size, lane.w * 0.62)
  const x = board.x(lane.x + lane.w / 2) - width / 2
  const y = board.y(0)
  ctx.fillStyle = icePattern(ctx, colours)
  ctx.fillRect(x, y, width, board.y(depth) - y)
  ctx.strokeStyle = colours.ink
  ctx.lineWidth = 1.6
  ctx.setLineDash([])
  ctx.strokeRect(x, y, width, board.y(depth) - y)
}

export const isPinned = (margin_K: number): boolean =>
  margin_K < scale_K.bottom + 0.3 || margin_K > scale_K.top - 0.2

/** ± twice the standard uncertainty; ink where measured, magenta and dashed where inferred. */
const drawWhisker = (board: Board, scene: Scene, lane: Lane, margin_K: number): void => {
  const u_K = marginU_K(lane.item)
  if (u_K === null || lane.mark === 'turned' || isPinned(margin_K)) return
  const { ctx } = board
  const { colours, size } = scene
  const inferred = isInferred(evidenceOf(lane.item.verdict.evidence))
  const x = board.x(lane.x + lane.w / 2)
  const [low, high] = [board.y(margin_K - 2 * u_K), board.y(margin_K + 2 * u_K)]
  const cap = Math.min(4 * size, lane.w * 0.3)
  ctx.strokeStyle = inferred ? colours.mag : colours.ink
  ctx.lineWidth = 1.5 * size
  ctx.setLineDash(inferred ? [3 * size, 2 * size] : [])
  ctx.beginPath()
  ctx.moveTo(x, high)
  ctx.lineTo(x, low)
  ctx.stroke()
  ctx.setLineDash([])
  ctx.beginPath()
  ctx.moveTo(x - cap, high)
  ctx.lineTo(x + cap, high)
  ctx.moveTo(x - cap, low)
  ctx.lineTo(x + cap, low)
  ctx.stroke()
}

/** Least marks are 20 px across at a desk; larger where somebody may have to act. */
const markSize = (scene: Scene, lane: Lane): number =>
  scene.size *
  (lane.mark === 'turned' ? 1.15 : needsRoom(lane.mark) ? 1.05 : Math.min(0.85, lane.w / 17))

const silent_K = 3.2

const drawLaneMark = (board: Board, scene: Scene, lane: Lane): void => {
  const { ctx } = board
  const { colours, size } = scene
  const x = board.x(lane.x + lane.w / 2)
  const margin = scene.margin(lane.item)
  const scale = markSize(scene, lane)
  if (lane.mark === 'silent' || margin === null) {
    drawMark(ctx, lane.mark, x, board.y(silent_K), scale * 1.1, colours, scene.stale)
    return
  }
  drawWhisker(board, scene, lane, margin)
  if (margin < scale_K.bottom + 0.3) {
    drawMark(ctx, lane.mark, x, board.bottom - 26 * size, scale, colours, scene.stale)
    drawChevron(ctx, x, board.bottom - 12 * size, true, size, colours.ink)
  } else if (margin > scale_K.top - 0.2) {
    drawMark(ctx, lane.mark, x, board.top + 24 * size, scale, colours, scene.stale)
    drawChevron(ctx, x, board.top + 11 * size, false, size, colours.ink)
  } else drawMark(ctx, lane.mark, x, board.y(margin), scale, colours, scene.stale)
}

const drawSeparator = (board: Board, scene: Scene, x: number): void => {
  board.ctx.fillStyle = faded(scene.colours.ink, 0.1)
  board.ctx.fillRect(board.x(x) - 0.5, board.top, 1, board.bottom - board.top)
}

/** What moves: track, forecast, ice, whisker, mark. Texts come after all marks, in laneTexts.ts. */
export const drawLane = (board: Board, scene: Scene, lane: Lane): void => {
  const { ctx } = board
  const x = board.x(lane.x)
  drawSeparator(board, scene, lane.x)
  if (scene.near === lane.item.id) {
    ctx.fillStyle = faded(scene.colours.ink, 0.07)
    ctx.fillRect(x, board.top, lane.w, board.bottom - board.top)
  }
  ctx.save()
  clipTo(board, x, x + lane.w)
  drawIceColumn(board, scene, lane)
  if (lane.mark !== 'silent') drawTrack(board, scene, lane)
  drawForecast(board, scene, lane)
  ctx.restore()
  drawLaneMark(board, scene, lane)
}

/** A strip of folded lanes: a small mark for each, and how many they are. */
export const drawFold = (board: Board, scene: Scene, fold: Fold): void => {
  const { ctx } = board
  const { colours, size } = scene
  drawSeparator(board, scene, fold.x)
  const x = board.x(fold.x + fold.w * 0.34)
  for (const [i, item] of fold.items.entries()) {
    const margin = scene.margin(item)
    const mark = fold.marks[i]
    if (margin === null || mark === undefined) continue
    const low = margin < scale_K.bottom + 0.3
    const y = low
      ? board.bottom - 22 * size
      : margin > scale_K.top - 0.2
        ? board.top + 20 * size
        : board.y(margin)
    drawMark(ctx, mark, x, y, 0.62 * size, colours, scene.stale)
    if (low) drawChevron(ctx, x, board.bottom - 11 * size, true, size * 0.8, colours.ink)
  }
}

import { clockMinute, duration, num, signed } from '../format.js'
import { marginU_K, needsRoom, turnedAt_ms, turnedDepth_K } from '../shown.js'
import { isPinned } from './laneMarks.js'
import type { Fold, Lane } from './lanes.js'
import { type Board, fitted, haloText, type Scene, setFont } from './scene.js'

/**
 * Where the sounding stands: over the whisker of what is below, under that of what is near; never on
 * the line itself.
 */
const soundingLevel = (board: Board, { size }: Scene, lane: Lane, margin: number): number => {
  const u_K = marginU_K(lane.item) ?? 0
  const line = board.y(0)
  const under = board.y(margin - 2 * u_K) + 17 * size
  const over = board.y(margin + 2 * u_K) - 7 * size
  const onLine = (y: number) => y < line + 16 * size && y > line - 4 * size
  // Above the line stands the name.
  const leaves = margin < 0 && over < line + 16 * size
  const wanted =
    lane.mark === 'near' || leaves || onLine(over) || over < board.top + 14 * size ? under : over
  const clear = onLine(wanted) ? line + 18 * size : wanted
  return Math.max(board.top + 15 * size, Math.min(board.bottom - 5 * size, clear))
}

type Taken = { right: number; y: number }

/** The sounding: the margin in figures at every mark that asks for a hand; none lies on another. */
const drawSounding = (board: Board, scene: Scene, lane: Lane, taken: Taken[]): void => {
  const margin = scene.margin(lane.item)
  if (!needsRoom(lane.mark) || margin === null) return
  const { ctx } = board
  const { colours, size } = scene
  const x = board.x(lane.x + lane.w / 2)
  ctx.textAlign = 'center'
  ctx.textBaseline = 'alphabetic'
  setFont(board, scene, 15, 700)
  if (lane.mark === 'turned') {
    const depth = turnedDepth_K(lane.item)
    const at_ms = turnedAt_ms(lane.item)
    const time = at_ms === null ? null : clockMinute(at_ms, scene.zone)
    if (depth === null && time === null) return
    const from = board.y(Math.min(depth ?? 0, margin)) + (depth === null ? 16 * size : 0)
    // A shallow turn lies under the mark itself: the figure clears it.
    const under = Math.max(from + 17 * size, board.y(margin) + 31 * size)
    let y = Math.min(
      depth === null || depth > -2 ? under : from + 17 * size,
      board.bottom - 20 * size,
    )
    if (depth !== null) {
      taken.push({ right: x + ctx.measureText(num(depth)).width / 2 + 1, y })
      haloText(ctx, num(depth), x, y, colours.ink, colours.air)
      y += 15 * size
    }
    if (time !== null) {
      setFont(board, scene, 12, 400)
      haloText(ctx, time, x, y, colours.ink, colours.air)
    }
    return
  }
  const text = scene.stale
    ? duration(scene.now_ms - scene.asOf_ms)
    : lane.mark === 'near'
      ? signed(margin)
      : num(margin)
  const half = ctx.measureText(text).width / 2 + 1
  const level = soundingLevel(board, scene, lane, margin)
  const isFree = (y: number) =>
    taken.every((t) => t.right < x - half || Math.abs(t.y - y) >= 15 * size)
  const shift = [0, 16, -16, 32].find((s) => isFree(level + s * size)) ?? 0
  const y = level + shift * size
  taken.push({ right: x + half, y })
  haloText(ctx, text, x, y, colours.ink, colours.air)
}

/** A name with less room than this is written where there is more, px. */
const leastName = 84

/**
 * The name upright beside the mark: above the line, over the mark where that stands there too; under
 * the line, and under the sounding, where above there is no room.
 */
const drawName = (board: Board, scene: Scene, lane: Lane): void => {
  const opened = needsRoom(lane.mark) || lane.mark === 'silent'
  if (!opened || lane.w < 24 * scene.size) return
  const { ctx } = board
  const { colours, size } = scene
  const margin = scene.margin(lane.item)
  const line = board.y(0)
  const overMark = margin !== null && margin > -0.4
  const foot = Math.min(line - 9 * size, overMark ? board.y(margin ?? 0) - 17 * size : line)
  const above = foot - board.top - 6
  const head =
    margin !== null && lane.mark === 'near'
      ? Math.max(line + 10 * size, soundingLevel(board, scene, lane, margin) + 8 * size)
      : line + 10 * size
  const below = board.bottom - head - 8
  const isBelow = above < leastName * size && below > above
  ctx.save()
  ctx.translate(board.x(lane.x + lane.w) - 5 * size, isBelow ? head : foot)
  ctx.rotate(-Math.PI / 2)
  setFont(board, scene, 13)
  ctx.textBaseline = 'alphabetic'
  ctx.textAlign = isBelow ? 'right' : 'left'
  const text = fitted(ctx, lane.item.productName, isBelow ? below : above)
  haloText(ctx, text, 0, 0, colours.ink, isBelow ? colours.d1 : colours.air, 3)
  ctx.restore()
}

/** Names and soundings, after all marks: lanes left to right. */
export const drawTexts = (board: Board, scene: Scene, parts: readonly (Lane | Fold)[]): void => {
  const taken: Taken[] = []
  for (const part of parts) if (part.kind === 'lane') drawName(board, scene, part)
  for (const part of parts)
    if (part.kind === 'lane') drawSounding(board, scene, part, taken)
    else drawFoldText(board, scene, part)
}

/** How many calm items a strip holds. */
const drawFoldText = (board: Board, scene: Scene, part: Fold): void => {
  const { ctx } = board
  const { colours, size } = scene
  const text = scene.say('waterline.folded', { count: part.items.length })
  ctx.save()
  ctx.translate(board.x(part.x + part.w) - 4 * size, board.y(0) - 9 * size)
  ctx.rotate(-Math.PI / 2)
  setFont(board, scene, 12, 650)
  ctx.textAlign = 'left'
  ctx.textBaseline = 'alphabetic'
  haloText(ctx, text, 0, 0, colours['ink-2'], colours.air, 3)
  ctx.restore()
}

/** Runs of pinned neighbours share one figure: how far beyond the edge they are. */
export const drawPinned = (board: Board, scene: Scene, lanes: readonly (Lane | Fold)[]): void => {
  const { ctx } = board
  const { colours, size } = scene
  setFont(board, scene, 12)
  ctx.textAlign = 'center'
  ctx.textBaseline = 'alphabetic'
  let run: { from: number; to: number; margins: number[]; low: boolean } | null = null
  const flush = (): void => {
    if (run === null) return
    const least = Math.min(...run.margins)
    const most = Math.max(...run.margins)
    const [a, b] = [signed(least, 0), signed(most, 0)]
    const texts = a === b ? [`${a} K`, a] : [`${a}…${b} K`, `${a}…${b}`, a]
    const room = run.to - run.from + 4
    const text = texts.find((t) => ctx.measureText(t).width <= room)
    const y = run.low ? board.bottom - 42 * size : board.top + 46 * size
    if (text !== undefined)
      haloText(
        ctx,
        text,
        (run.from + run.to) / 2,
        y,
        colours.ink,
        run.low ? colours.d1 : colours.air,
      )
    run = null
  }
  for (const lane of lanes) {
    const margins =
      lane.kind === 'lane'
        ? [scene.margin(lane.item)]
        : lane.items.map((item) => scene.margin(item))
    const known = margins.filter((m) => m !== null && isPinned(m)) as number[]
    const all = known.length > 0 && known.length === margins.length
    const low = all && (known[0] ?? 0) < 0
    const alone = lane.kind === 'lane' && needsRoom(lane.mark) // it bears its own sounding
    if (!all || alone) {
      flush()
      continue
    }
    const [from, to] = [board.x(lane.x), board.x(lane.x + lane.w)]
    if (run !== null && run.low === low) {
      run.to = to
      run.margins.push(...known)
    } else {
      flush()
      run = { from, to, margins: known, low }
    }
  }
  flush()
}

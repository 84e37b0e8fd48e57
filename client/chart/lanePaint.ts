import { clockMinute, duration, num, signed } from '../format.js'
import {
  evidenceOf,
  isAsIntended,
  isInferred,
  marginU_K,
  needsRoom,
  shortPlace,
  turnedAt_ms,
  turnedDepth_K,
} from '../shown.js'
import type { Fold, Lane } from './lanes.js'
import { drawChevron, drawEvidence, drawMark, icePattern } from './pen.js'
import { type Board, fitted, haloText, type Scene, scale_K, setFont } from './scene.js'
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

const isPinned = (margin_K: number): boolean =>
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
  const wanted = lane.mark === 'near' || onLine(over) || over < board.top + 14 * size ? under : over
  const clear = onLine(wanted) ? line + 18 * size : wanted
  return Math.max(board.top + 15 * size, Math.min(board.bottom - 5 * size, clear))
}

/** The sounding: the margin in figures at every mark that asks for a hand. */
const drawSounding = (board: Board, scene: Scene, lane: Lane): void => {
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
      haloText(ctx, num(depth), x, y, colours.ink, colours.air)
      y += 15 * size
    }
    if (time !== null) {
      setFont(board, scene, 12, 400)
      haloText(ctx, time, x, y, colours.ink, colours.air)
    }
    return
  }
  const y = soundingLevel(board, scene, lane, margin)
  const text = scene.stale
    ? duration(scene.now_ms - scene.asOf_ms)
    : lane.mark === 'near'
      ? signed(margin)
      : num(margin)
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
  if (!opened || lane.w < 30 * scene.size) return
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

const drawSeparator = (board: Board, scene: Scene, x: number): void => {
  board.ctx.fillStyle = faded(scene.colours.ink, 0.1)
  board.ctx.fillRect(board.x(x) - 0.5, board.top, 1, board.bottom - board.top)
}

/** What moves: track, forecast, ice, whisker, mark. Texts come after all marks, in `drawTexts`. */
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

export const drawTexts = (board: Board, scene: Scene, part: Lane | Fold): void => {
  if (part.kind === 'lane') {
    drawName(board, scene, part)
    drawSounding(board, scene, part)
    return
  }
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

/** The place under a lane; where it is narrow, without what its storage unit is called. */
const footText = ({ ctx }: Board, { size }: Scene, part: Lane | Fold): string => {
  if (part.kind === 'fold') return `×${part.items.length}`
  const place = shortPlace(part.item.position)
  const room = Math.max(part.w + 2, 20 * size)
  if (ctx.measureText(place).width <= room) return place
  // `TK-2` in TK is 2, and `tray 5` is 5: the neighbours say what kind of place it is.
  const tail = place.startsWith(part.item.storageUnit)
    ? place.slice(part.item.storageUnit.length).replace(/^[\s-]+/, '')
    : (place.split(/[\s,]+/).find((word) => /\d/.test(word)) ?? place)
  const text = fitted(ctx, tail === '' ? place : tail, room)
  return text.length < 3 && text.endsWith('…') ? '' : text
}

/** The foot of a lane: what it rests on, and its place. Calm places give way where room is short. */
export const drawFeet = (board: Board, scene: Scene): void => {
  const { ctx } = board
  const { colours, size } = scene
  const parts = scene.layout.bays.flatMap((b) => b.parts)
  const seen = parts.filter((p) => board.x(p.x + p.w) > board.left && board.x(p.x) < board.right)
  for (const part of seen) {
    if (part.kind === 'fold') continue
    const x = board.x(part.x + part.w / 2)
    const scale = Math.min(size, (part.w - 2) / 12)
    drawEvidence(
      ctx,
      evidenceOf(part.item.verdict.evidence),
      x,
      board.bottom + 14 * size,
      scale,
      colours,
    )
  }
  ctx.textAlign = 'center'
  ctx.textBaseline = 'alphabetic'
  const taken: [number, number][] = []
  const bold = (part: Lane | Fold) =>
    part.kind === 'lane' && (needsRoom(part.mark) || part.mark === 'silent')
  for (const pass of [true, false]) {
    setFont(board, scene, 12, pass ? 700 : 400)
    ctx.fillStyle = pass ? colours.ink : colours['ink-2']
    for (const part of seen) {
      if (bold(part) !== pass) continue
      const text = footText(board, scene, part)
      const x = board.x(part.x + part.w / 2)
      const half = ctx.measureText(text).width / 2 + 0.7
      if (taken.some(([a, b]) => x - half < b && x + half > a)) continue
      taken.push([x - half, x + half])
      ctx.fillText(text, x, board.bottom + 35 * size)
    }
  }
}

import type { Chart } from 'chart.js'
import { celsius, clockMinute, interval } from '../format.js'
import { drawMark, drawPractice, gapPattern } from './pen.js'
import { haloText } from './scene.js'
import type { TimeView } from './timeLines.js'
import { faded } from './tokens.js'
import { gapsOf, tracesOf } from './traces.js'

/** Under the data: tints, gaps, the own freezing point in its band, label limits. */
export const ground = (chart: Chart, view: TimeView): void => {
  const { ctx, chartArea: area } = chart
  const [x, y] = [chart.scales.x, chart.scales.y]
  if (x === undefined || y === undefined) return
  const { colours, item } = view
  const { freezingPoint_C, freezingPoint_u_K } = item.verdict
  const held = (v: number) => Math.max(area.top, Math.min(area.bottom, y.getPixelForValue(v)))
  const w = area.right - area.left
  const line = held(freezingPoint_C)
  ctx.save()
  ctx.fillStyle = colours.air
  ctx.fillRect(area.left, area.top, w, line - area.top)
  const levels = [0, ...item.tints_K.map((k) => k ?? -999), -999]
  for (const [i, tint] of (['d1', 'd2', 'd3', 'd4'] as const).entries()) {
    const from = held(freezingPoint_C + (levels[i] ?? -999))
    const to = held(freezingPoint_C + (levels[i + 1] ?? -999))
    ctx.fillStyle = colours[view.stale ? 'd1' : tint]
    if (to > from) ctx.fillRect(area.left, from, w, to - from)
  }
  if (view.practice) drawPractice(ctx, area, view.say('practice.word'), colours)
  ctx.beginPath()
  ctx.rect(area.left, area.top, w, area.bottom - area.top)
  ctx.clip()
  for (const gap of gapsOf(view.readings, view.now_ms)) {
    const from = x.getPixelForValue(gap.from_ms)
    const to = x.getPixelForValue(gap.until_ms)
    ctx.fillStyle = gapPattern(ctx, colours)
    ctx.fillRect(from, area.top, to - from, area.bottom - area.top)
  }
  const u = Math.max(1.5, line - y.getPixelForValue(freezingPoint_C + 2 * freezingPoint_u_K))
  ctx.fillStyle = faded(colours.ink, 0.22)
  ctx.fillRect(area.left, line - u, w, 2 * u)
  ctx.fillStyle = colours.ink
  ctx.fillRect(area.left, line - 1, w, 2)
  ctx.setLineDash([1, 4])
  ctx.strokeStyle = colours['ink-2']
  ctx.lineWidth = 1.2
  for (const limit of item.label_C ?? []) {
    const at = y.getPixelForValue(limit)
    ctx.beginPath()
    ctx.moveTo(area.left, at)
    ctx.lineTo(area.right, at)
    ctx.stroke()
  }
  ctx.restore()
}

/** Keeps labels from lying on each other: each takes its place, and the next goes round it. */
const placer = () => {
  const taken: { x: number; y: number; w: number }[] = []
  return (x: number, y: number, w: number, step: number, bounds: [number, number]): number => {
    for (const shift of [0, step, -step, 2 * step, -2 * step, 3 * step, -3 * step]) {
      const at = y + shift
      const free = taken.every((t) => Math.abs(t.y - at) >= 14 || t.x > x + w || t.x + t.w < x)
      if (free && at > bounds[0] + 12 && at < bounds[1] - 3) {
        taken.push({ x, y: at, w })
        return at
      }
    }
    taken.push({ x, y, w })
    return y
  }
}

/** Over the data: what the lines are called, now, and the mark. */
export const labels = (chart: Chart, view: TimeView): void => {
  const { ctx, chartArea: area } = chart
  const [x, y] = [chart.scales.x, chart.scales.y]
  if (x === undefined || y === undefined) return
  const { colours, item, say } = view
  const { freezingPoint_C, freezingPoint_u_K, temperature_C } = item.verdict
  const place = placer()
  const bounds: [number, number] = [area.top, area.bottom]
  const write = (text: string, at: number, level: number, weight: number, colour: string) => {
    ctx.font = `${weight} 13px ${colours.font}`
    const w = ctx.measureText(text).width
    const left = Math.max(area.left + 4, Math.min(at, area.right - w - 4))
    haloText(ctx, text, left, place(left, level, w, 16, bounds), colour, colours.air)
  }
  ctx.save()
  ctx.textAlign = 'left'
  ctx.textBaseline = 'alphabetic'
  ctx.setLineDash([])
  const now = x.getPixelForValue(view.now_ms)
  if (now >= area.left && now <= area.right) {
    ctx.fillStyle = colours.ink
    ctx.fillRect(now - 0.6, area.top, 1.2, area.bottom - area.top)
    write(say('chart.now'), now + 5, area.top + 14, 650, colours.ink)
  }
  if (view.readings.probes.length === 0)
    write(say('chart.noProbe'), area.left + 8, area.top + 30, 400, colours.ink)
  const range = interval(
    freezingPoint_C - 2 * freezingPoint_u_K,
    freezingPoint_C + 2 * freezingPoint_u_K,
    2,
  )
  // Water's own line is known better than two decimals say.
  const key = view.narrow ? 'chart.ownShort' : range.includes('…') ? 'chart.own' : 'chart.ownExact'
  const own = say(key, { T: celsius(freezingPoint_C, 2), range })
  write(own, area.left + 8, y.getPixelForValue(freezingPoint_C) - 7, 650, colours.ink)
  const [low, high] = item.label_C ?? []
  for (const [limit, key] of [
    [low, 'chart.labelLow'],
    [high, 'chart.labelHigh'],
  ] as const) {
    if (limit === undefined) continue
    const level = y.getPixelForValue(limit)
    if (level > area.top + 8 && level < area.bottom)
      write(say(key, { T: celsius(limit) }), area.left + 8, level - 5, 400, colours['ink-2'])
  }
  for (const gap of gapsOf(view.readings, view.now_ms)) {
    const from = x.getPixelForValue(gap.from_ms)
    if (from < area.left || from > area.right || view.narrow) continue
    const times = `${clockMinute(gap.from_ms, view.zone)}–${clockMinute(gap.until_ms, view.zone)}`
    write(say('chart.gap', { times }), from + 4, area.bottom - 8, 400, colours.ink)
  }
  for (const probe of tracesOf(view.readings))
    for (const point of probe.doubtful) {
      const at = x.getPixelForValue(point.x)
      if (point.y === null || at < area.left || at > area.right) continue
      // Off the scale: at its edge, with its figure. It never stretches the axis.
      const high = point.y > y.max
      if (!high && point.y >= y.min) continue
      ctx.strokeStyle = colours['ink-3']
      ctx.lineWidth = 1.6
      const edge = high ? area.top + 8 : area.bottom - 8
      ctx.beginPath()
      for (const way of [1, -1]) {
        ctx.moveTo(at - 4, edge - 4 * way)
        ctx.lineTo(at + 4, edge + 4 * way)
      }
      ctx.stroke()
      write(
        say('chart.notBelieved', { T: celsius(point.y) }),
        at + 8,
        edge + 5,
        400,
        colours['ink-2'],
      )
    }
  ctx.font = `400 12px ${colours.font}`
  ctx.fillStyle = colours['ink-2']
  ctx.textAlign = 'right'
  ctx.fillText('°C', area.left - 8, area.top - 10)
  if (temperature_C !== null && now >= area.left && now <= area.right)
    drawMark(ctx, view.mark, now, y.getPixelForValue(temperature_C), 1, colours, view.stale)
  ctx.strokeStyle = colours.ink
  ctx.lineWidth = 1
  ctx.strokeRect(area.left, area.top, area.right - area.left, area.bottom - area.top)
  ctx.restore()
}

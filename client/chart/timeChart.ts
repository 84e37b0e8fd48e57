import {
  Chart,
  type ChartDataset,
  type ChartOptions,
  Filler,
  LinearScale,
  LineController,
  LineElement,
  type Plugin,
  PointElement,
  TimeScale,
} from 'chart.js'
import type { ItemReadings, ItemView } from '../../config/schema/api.js'
import { celsius, chance, clockMinute, interval, num } from '../format.js'
import type { MarkKind } from '../shown.js'
import { dayStart_ms } from './dates.js'
import { drawMark, drawPractice, gapPattern } from './pen.js'
import { haloText } from './scene.js'
import { type Colours, faded } from './tokens.js'
import { gapsOf, type Point, type Trace, tracesOf } from './traces.js'

Chart.register(LinearScale, TimeScale, LineController, LineElement, PointElement, Filler)

export type TimeView = {
  readonly item: ItemView
  readonly mark: MarkKind
  readonly readings: ItemReadings
  readonly from_ms: number
  readonly until_ms: number
  readonly now_ms: number
  readonly zone: string
  readonly colours: Colours
  readonly practice: boolean
  readonly stale: boolean
  readonly narrow: boolean
  readonly limit: { readonly chance: number; readonly text: string }
  say(key: string, values?: Readonly<Record<string, string | number>>): string
}

type Line = ChartDataset<'line', Point[]>

/** Both charts leave this much at the left, so that their times stand under each other. */
const axisWidth = 48

const bare = { pointRadius: 0, tension: 0, spanGaps: false, borderWidth: 0 } as const

/** A wash between two lines: the second fills up to the first. */
const band = (low: Point[], high: Point[], colour: string): Line[] => [
  { ...bare, data: low, fill: false, borderColor: 'transparent' },
  { ...bare, data: high, fill: '-1', backgroundColor: colour, borderColor: 'transparent' },
]

const traceLine = (trace: Trace, colours: Colours): Line => {
  const base = { data: trace.good, spanGaps: false, tension: 0, borderColor: colours.ink }
  switch (trace.placement) {
    case 'in-buffer':
      return {
        ...base,
        showLine: false,
        pointStyle: 'rect',
        pointRadius: 3.6,
        pointBorderColor: colours.ink,
        pointBorderWidth: 1.5,
        pointBackgroundColor: colours.sheet,
      }
    case 'in-air':
      return { ...base, borderWidth: 1.3, pointRadius: 1.7, pointBackgroundColor: colours.ink }
    default:
      return { ...base, borderWidth: 1.6, pointRadius: 2.3, pointBackgroundColor: colours.ink }
  }
}

const doubtfulLine = (trace: Trace, colours: Colours): Line => ({
  data: trace.doubtful,
  showLine: false,
  pointStyle: 'crossRot',
  pointRadius: 4,
  pointBorderColor: colours['ink-3'],
  pointBorderWidth: 1.6,
})

const datasets = (view: TimeView, traces: readonly Trace[]): Line[] => {
  const { readings, colours } = view
  const at = (k: 1 | 2 | 3, inner = 1) =>
    readings.forecast.map((f): Point => ({ x: f[0], y: f[2] + (f[k] - f[2]) * inner }))
  const reckoned = (k: number) =>
    readings.estimate.map(([x, T, u]): Point => ({ x, y: T + 2 * k * u }))
  const forecast: Line[] = view.stale
    ? []
    : [
        ...band(at(1), at(3), faded(colours['mag-2'], 0.18)),
        ...band(at(1, 0.5), at(3, 0.5), faded(colours['mag-2'], 0.22)),
        { ...bare, data: at(2), borderColor: colours.mag, borderWidth: 2, borderDash: [6, 4] },
      ]
  return [
    ...band(reckoned(-1), reckoned(1), faded(colours['mag-2'], 0.3)),
    { ...bare, data: reckoned(0), borderColor: colours.mag, borderWidth: 2.4 },
    ...forecast,
    ...traces.map((trace) => traceLine(trace, colours)),
    ...traces.map((trace) => doubtfulLine(trace, colours)),
  ]
}

/** Steps of a temperature axis, K, of which the first that leaves at most eight is taken. */
const niceSteps_K = [0.5, 1, 2, 5, 10, 20, 50] as const

/** The temperatures to be seen, with room about them; at least 4 K, or noise would look like news. */
const rangeOf = (
  view: TimeView,
  lines: readonly Line[],
): { min: number; max: number; step: number } => {
  const seen = lines
    .flatMap((line) => line.data)
    .filter((p) => p.x >= view.from_ms && p.x <= view.until_ms && p.y !== null)
    .map((p) => p.y as number)
  const { freezingPoint_C } = view.item.verdict
  const low = Math.min(freezingPoint_C - 1, ...seen)
  const high = Math.max(freezingPoint_C + 1, ...seen)
  const pad = Math.max(0.4, (high - low) * 0.05, (4 - (high - low)) / 2)
  const span = high - low + 2 * pad
  const step = niceSteps_K.find((k) => span / k <= 10) ?? 100
  return {
    min: Math.floor((low - pad) / step) * step,
    max: Math.ceil((high + pad) / step) * step,
    step,
  }
}

/** Under the data: tints, gaps, the own freezing point in its band, label limits. */
const ground = (chart: Chart, view: TimeView): void => {
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
const labels = (chart: Chart, view: TimeView): void => {
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
  const own = view.narrow
    ? say('chart.ownShort', { T: celsius(freezingPoint_C, 2) })
    : say('chart.own', {
        T: celsius(freezingPoint_C, 2),
        range: interval(
          freezingPoint_C - 2 * freezingPoint_u_K,
          freezingPoint_C + 2 * freezingPoint_u_K,
          2,
        ),
      })
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

const axis = (colours: Colours) => ({
  grid: { color: faded(colours.ink, 0.09), tickColor: colours.ink, tickLength: 5 },
  border: { color: colours.ink },
  ticks: {
    color: colours['ink-2'],
    font: { family: colours.font, size: 12 },
    maxRotation: 0,
    autoSkipPadding: 24,
  },
})

const minute_ms = 60_000
const steps_min = [1, 2, 5, 10, 15, 20, 30, 60, 120, 180, 360, 720, 1440, 2880, 10_080, 43_200]
/** A time and the room about it, px. */
const tickRoom = 64

/** Times that a person would write on an axis: whole steps of the site's own clock. */
const roundTimes = (view: TimeView, width: number): { value: number }[] => {
  const span = view.until_ms - view.from_ms
  const step_ms =
    (steps_min.find((m) => (span / (m * minute_ms)) * tickRoom <= width) ?? 43_200) * minute_ms
  const midnight_ms = dayStart_ms(view.from_ms, view.zone)
  const first = midnight_ms + Math.ceil((view.from_ms - midnight_ms) / step_ms) * step_ms
  const count = Math.max(0, Math.floor((view.until_ms - first) / step_ms) + 1)
  return Array.from({ length: count }, (_, i) => ({ value: first + i * step_ms }))
}

const timeAxis = (view: TimeView, shown: boolean) => ({
  ...axis(view.colours),
  type: 'time' as const,
  min: view.from_ms,
  max: view.until_ms,
  adapters: { date: { zone: view.zone } },
  afterBuildTicks: (scale: { ticks: { value: number }[]; width: number; chart: Chart }) => {
    scale.ticks = roundTimes(view, scale.chart.width - axisWidth)
  },
  ...(shown ? {} : { ticks: { display: false } }),
})

const frozenOptions: ChartOptions<'line'> = {
  responsive: false,
  maintainAspectRatio: false,
  animation: false,
  parsing: false,
  normalized: true,
  events: [],
}

/** Chance of turning from now on, low and high side, with the site's limit. */
const strip = (canvas: HTMLCanvasElement, seen: () => TimeView | null): Chart<'line', Point[]> => {
  const painter: Plugin<'line'> = {
    id: 'chance',
    beforeDatasetsDraw(chart) {
      const view = seen()
      if (view === null) return
      const { ctx, chartArea: area } = chart
      ctx.fillStyle = view.colours.air
      ctx.fillRect(area.left, area.top, area.right - area.left, area.bottom - area.top)
      if (view.practice) drawPractice(ctx, area, view.say('practice.word'), view.colours)
    },
    afterDatasetsDraw(chart) {
      const view = seen()
      const [x, y] = [chart.scales.x, chart.scales.y]
      if (view === null || x === undefined || y === undefined) return
      const { ctx, chartArea: area } = chart
      const { colours, item } = view
      ctx.save()
      const limit = y.getPixelForValue(view.limit.chance)
      ctx.setLineDash([8, 3])
      ctx.strokeStyle = colours.red
      ctx.lineWidth = 1.3
      ctx.beginPath()
      ctx.moveTo(area.left, limit)
      ctx.lineTo(area.right, limit)
      ctx.stroke()
      ctx.setLineDash([])
      ctx.font = `400 13px ${colours.font}`
      ctx.textBaseline = 'alphabetic'
      haloText(ctx, view.limit.text, area.left + 8, limit - 6, colours.ink, colours.air)
      const now = x.getPixelForValue(view.now_ms)
      if (now > area.left && now < area.right) {
        ctx.fillStyle = colours.ink
        ctx.fillRect(now - 0.6, area.top, 1.2, area.bottom - area.top)
        const [low, , high] = item.verdict.turned.any
        ctx.font = `650 13px ${colours.font}`
        ctx.textAlign = 'right'
        const text = view.say(view.narrow ? 'chart.beforeShort' : 'chart.before', {
          count: item.count,
          chance: chance(low, high),
        })
        if (item.verdict.evidence !== 'not assessable')
          haloText(ctx, text, now - 8, area.top + 18, colours.ink, colours.air)
      }
      ctx.strokeStyle = colours.ink
      ctx.lineWidth = 1
      ctx.strokeRect(area.left, area.top, area.right - area.left, area.bottom - area.top)
      ctx.restore()
    },
  }
  return new Chart<'line', Point[]>(canvas, {
    type: 'line',
    data: { datasets: [] },
    options: { ...frozenOptions },
    plugins: [painter],
  })
}

const stripLines = (view: TimeView): Line[] => {
  const at = (k: 1 | 3) => view.readings.chance.map((f): Point => ({ x: f[0], y: f[k] }))
  const { colours } = view
  if (view.stale) return []
  return [
    ...band(at(1), at(3), faded(colours['mag-2'], 0.32)),
    { ...bare, data: at(3), borderColor: colours.mag, borderWidth: 2 },
    { ...bare, data: at(1), borderColor: colours.mag, borderWidth: 2, borderDash: [2, 3] },
  ]
}

/** The item's temperatures over time, and under them the chance of turning on the same axis. */
export const timeChart = (temperature: HTMLCanvasElement, chanceCanvas: HTMLCanvasElement) => {
  let view: TimeView | null = null
  const painter: Plugin<'line'> = {
    id: 'ground',
    beforeDatasetsDraw(chart) {
      if (view !== null) ground(chart as unknown as Chart, view)
    },
    afterDatasetsDraw(chart) {
      if (view !== null) labels(chart as unknown as Chart, view)
    },
  }
  const above = new Chart<'line', Point[]>(temperature, {
    type: 'line',
    data: { datasets: [] },
    options: { ...frozenOptions },
    plugins: [painter],
  })
  const below = strip(chanceCanvas, () => view)
  const fixed = {
    afterFit: (scale: { width: number }) => {
      scale.width = axisWidth
    },
  }
  return {
    show(next: TimeView, width: number, heights: readonly [number, number]): void {
      view = next
      const lines = datasets(next, tracesOf(next.readings))
      const believed = lines.slice(0, lines.length - next.readings.probes.length)
      const { min, max, step } = rangeOf(next, believed)
      const plain = axis(next.colours)
      above.data.datasets = lines
      above.options.scales = {
        x: timeAxis(next, true),
        y: {
          ...plain,
          ...fixed,
          type: 'linear',
          min,
          max,
          ticks: {
            ...plain.ticks,
            stepSize: step,
            callback: (v) => num(Number(v), step < 1 ? 1 : 0),
          },
        },
      }
      above.options.layout = { padding: { top: 24, right: 12 } }
      below.data.datasets = stripLines(next)
      below.options.scales = {
        x: timeAxis(next, false),
        y: {
          ...plain,
          ...fixed,
          type: 'linear',
          min: 0,
          max: 1,
          ticks: {
            ...plain.ticks,
            autoSkip: false,
            stepSize: 0.5,
            callback: (v) => `${num(Number(v) * 100, 0)} %`,
          },
        },
      }
      below.options.layout = { padding: { top: 8, right: 12 } }
      for (const [chart, height] of [
        [above, heights[0]],
        [below, heights[1]],
      ] as const) {
        if (chart.width !== width || chart.height !== height) chart.resize(width, height)
        chart.update('none')
      }
    },
    /** The instant under a place of the canvas, px from its left. */
    timeAt: (px: number): number => above.scales.x?.getValueForPixel(px) ?? 0,
    destroy(): void {
      above.destroy()
      below.destroy()
    },
  }
}

import type { ChartDataset } from 'chart.js'
import type { ItemReadings, ItemView } from '../../config/schema/api.js'
import type { MarkKind } from '../shown.js'
import { type Colours, faded } from './tokens.js'
import type { Point, Trace } from './traces.js'

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

export type Line = ChartDataset<'line', Point[]>

export const bare = { pointRadius: 0, tension: 0, spanGaps: false, borderWidth: 0 } as const

/** A wash between two lines: the second fills up to the first. */
export const band = (low: Point[], high: Point[], colour: string): Line[] => [
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

export const datasets = (view: TimeView, traces: readonly Trace[]): Line[] => {
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
export const rangeOf = (
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

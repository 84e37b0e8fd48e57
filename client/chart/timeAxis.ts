import type { Chart, ChartOptions } from 'chart.js'
import { dayStart_ms } from './dates.js'
import type { TimeView } from './timeLines.js'
import { type Colours, faded } from './tokens.js'

/** Both charts leave this much at the left, so that their times stand under each other. */
export const axisWidth = 48

export const axis = (colours: Colours) => ({
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

export const timeAxis = (view: TimeView, shown: boolean) => ({
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

export const frozenOptions: ChartOptions<'line'> = {
  responsive: false,
  maintainAspectRatio: false,
  animation: false,
  parsing: false,
  normalized: true,
  events: [],
}

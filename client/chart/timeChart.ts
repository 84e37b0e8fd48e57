import {
  Chart,
  Filler,
  LinearScale,
  LineController,
  LineElement,
  type Plugin,
  PointElement,
  TimeScale,
} from 'chart.js'
import { num } from '../format.js'
import { strip, stripLines } from './chanceStrip.js'
import { axis, axisWidth, frozenOptions, timeAxis } from './timeAxis.js'
import { ground, labels } from './timeGround.js'
import { datasets, rangeOf, type TimeView } from './timeLines.js'
import { type Point, tracesOf } from './traces.js'

Chart.register(LinearScale, TimeScale, LineController, LineElement, PointElement, Filler)

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
            autoSkip: false,
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

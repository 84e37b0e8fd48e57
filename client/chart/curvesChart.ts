import {
  Chart,
  LinearScale,
  LineController,
  LineElement,
  type Plugin,
  PointElement,
} from 'chart.js'
import type { ItemCurves } from '../../config/schema/api.js'
import { celsius, num } from '../format.js'
import type { MarkKind } from '../shown.js'
import { drawMark, drawPractice } from './pen.js'
import { haloText } from './scene.js'
import { type Colours, faded } from './tokens.js'

Chart.register(LinearScale, LineController, LineElement, PointElement)

export type CurvesView = {
  readonly curves: ItemCurves
  readonly mark: MarkKind
  readonly colours: Colours
  readonly practice: boolean
  say(key: string, values?: Readonly<Record<string, string | number>>): string
}

type Point = { x: number; y: number }
const points = (pairs: readonly (readonly [number, number])[]): Point[] =>
  pairs.map(([x, y]) => ({ x, y }))

const write = (
  chart: Chart,
  { colours }: CurvesView,
  text: string,
  x: number,
  y: number,
  align: 'left' | 'right' | 'center',
  weight = 400,
): void => {
  const { ctx, chartArea: area } = chart
  ctx.font = `${weight} 13px ${colours.font}`
  const w = ctx.measureText(text).width
  const from = align === 'left' ? x : align === 'right' ? x - w : x - w / 2
  ctx.textAlign = 'left'
  ctx.textBaseline = 'alphabetic'
  const held = Math.max(area.left + 4, Math.min(from, area.right - w - 4))
  const level = Math.max(area.top + 14, Math.min(y, area.bottom - 5))
  haloText(ctx, text, held, level, colours.ink, colours.air)
}

const ground = (chart: Chart, view: CurvesView): void => {
  const { ctx, chartArea: area } = chart
  const y = chart.scales.y
  if (y === undefined) return
  const line = y.getPixelForValue(view.curves.freezingPoint_C)
  ctx.fillStyle = view.colours.air
  ctx.fillRect(area.left, area.top, area.right - area.left, line - area.top)
  ctx.fillStyle = view.colours.d1
  ctx.fillRect(area.left, line, area.right - area.left, area.bottom - line)
  if (view.practice) drawPractice(ctx, area, view.say('practice.word'), view.colours)
  ctx.fillStyle = view.colours.ink
  ctx.fillRect(area.left, line - 1, area.right - area.left, 2)
}

/** The jump: straight up at equal heat, since nothing leaves in an instant. */
const drawJump = (chart: Chart, view: CurvesView): void => {
  const { ctx } = chart
  const [x, y] = [chart.scales.x, chart.scales.y]
  const { jump } = view.curves
  if (x === undefined || y === undefined || jump === null) return
  const at = x.getPixelForValue(jump.h_kJ_kg)
  const [from, to] = [y.getPixelForValue(jump.from_C), y.getPixelForValue(jump.end_C)]
  ctx.strokeStyle = view.colours.red
  ctx.lineWidth = 3
  ctx.setLineDash([])
  ctx.lineCap = 'butt'
  ctx.beginPath()
  ctx.moveTo(at, from - 8)
  ctx.lineTo(at, to + 8)
  ctx.moveTo(at - 6, to + 14)
  ctx.lineTo(at, to + 5)
  ctx.lineTo(at + 6, to + 14)
  ctx.stroke()
  drawMark(ctx, view.mark, at, from, 1, view.colours, false)
  ctx.beginPath()
  for (let i = 0; i < 6; i += 1) {
    const a = (i * Math.PI) / 3
    ctx.lineTo(at + 7 * Math.sin(a), to - 7 * Math.cos(a))
  }
  ctx.closePath()
  ctx.fillStyle = view.colours.sheet
  ctx.fill()
  ctx.strokeStyle = view.colours.red
  ctx.lineWidth = 2.4
  ctx.stroke()
  const middle = (from + to) / 2
  if (Math.abs(from - to) > 50) {
    write(chart, view, view.say('curves.jump'), at - 14, middle, 'right', 650)
    write(chart, view, view.say('curves.nothingLeaves'), at - 14, middle + 16, 'right')
  }
  write(chart, view, celsius(jump.end_C, 2), at - 12, to - 10, 'right', 650)
  write(chart, view, view.say('curves.stillLiquid'), at - 16, from + 5, 'right')
}

const drawLabels = (chart: Chart, view: CurvesView): void => {
  const { ctx, chartArea: area } = chart
  const [x, y] = [chart.scales.x, chart.scales.y]
  if (x === undefined || y === undefined) return
  const { solid90, liquid, freezingPoint_C } = view.curves
  ctx.save()
  if (solid90 !== null) {
    const [px, py] = [x.getPixelForValue(solid90.h_kJ_kg), y.getPixelForValue(solid90.T_C)]
    if (px >= area.left && py <= area.bottom) {
      ctx.fillStyle = view.colours.ink
      ctx.fillRect(px - 0.8, py - 6, 1.6, 12)
      write(chart, view, view.say('curves.solid90'), px + 8, py + 16, 'left')
    }
  }
  const plateau = (area.left + x.getPixelForValue(0)) / 2
  write(
    chart,
    view,
    view.say('curves.plateau'),
    plateau,
    y.getPixelForValue(freezingPoint_C) - 9,
    'center',
  )
  const warm = liquid.find(([, T]) => T >= (y.max + freezingPoint_C) / 2)
  if (warm !== undefined)
    write(
      chart,
      view,
      view.say('curves.liquid'),
      x.getPixelForValue(warm[0]) - 10,
      y.getPixelForValue(warm[1]) + 4,
      'right',
    )
  drawJump(chart, view)
  ctx.font = `400 12px ${view.colours.font}`
  ctx.fillStyle = view.colours['ink-2']
  ctx.textAlign = 'right'
  ctx.fillText('°C', area.left - 8, area.top - 10)
  ctx.strokeStyle = view.colours.ink
  ctx.lineWidth = 1
  ctx.setLineDash([])
  ctx.strokeRect(area.left, area.top, area.right - area.left, area.bottom - area.top)
  ctx.restore()
}

/** The span worth drawing: from a little above the line down past the jump and 90 % solid. */
const spanOf = ({ curves }: CurvesView) => {
  const { freezingPoint_C, jump, solid90, equilibrium } = curves
  const low = Math.min(
    freezingPoint_C - 4,
    (jump?.from_C ?? freezingPoint_C) - 2,
    Math.max(freezingPoint_C - 12, (solid90?.T_C ?? freezingPoint_C) - 1),
  )
  const high = freezingPoint_C + 6
  const seen = equilibrium.filter(([, T]) => T >= low && T <= high).map(([h]) => h)
  return {
    low: Math.floor(low),
    high: Math.ceil(high),
    from: Math.min(-50, ...seen),
    to: Math.max(20, ...seen),
  }
}

/** Temperature against heat content: one number, two branches, and the jump between them. */
export const curvesChart = (canvas: HTMLCanvasElement) => {
  let view: CurvesView | null = null
  const painter: Plugin<'line'> = {
    id: 'curves',
    beforeDatasetsDraw(chart) {
      if (view !== null) ground(chart as unknown as Chart, view)
    },
    afterDatasetsDraw(chart) {
      if (view !== null) drawLabels(chart as unknown as Chart, view)
    },
  }
  const chart = new Chart<'line', Point[]>(canvas, {
    type: 'line',
    data: { datasets: [] },
    options: {
      responsive: false,
      maintainAspectRatio: false,
      animation: false,
      parsing: false,
      events: [],
    },
    plugins: [painter],
  })
  return {
    show(next: CurvesView, width: number, height: number): void {
      view = next
      const { colours, curves } = next
      const span = spanOf(next)
      const ticks = { color: colours['ink-2'], font: { family: colours.font, size: 12 } }
      const grid = { color: faded(colours.ink, 0.07), tickColor: colours.ink, tickLength: 5 }
      chart.data.datasets = [
        {
          data: points(curves.equilibrium),
          borderColor: colours.mag,
          borderWidth: 3,
          pointRadius: 0,
          tension: 0,
        },
        {
          data: points(curves.liquid.filter(([, T]) => T <= curves.freezingPoint_C + 1e-6)),
          borderColor: colours.mag,
          borderWidth: 2.4,
          borderDash: [7, 4],
          pointRadius: 0,
          tension: 0,
        },
      ]
      chart.options.scales = {
        x: {
          type: 'linear',
          min: Math.floor(span.from / 10) * 10,
          max: Math.ceil(span.to / 10) * 10,
          grid,
          border: { color: colours.ink },
          ticks: {
            ...ticks,
            includeBounds: false,
            maxTicksLimit: 6,
            callback: (v) => num(Number(v), 0),
            maxRotation: 0,
          },
          title: {
            display: true,
            text: next.say('curves.heat'),
            color: colours['ink-2'],
            font: { family: colours.font, size: 12 },
            padding: 2,
            align: 'end',
          },
        },
        y: {
          type: 'linear',
          min: span.low,
          max: span.high,
          grid,
          border: { color: colours.ink },
          ticks: { ...ticks, callback: (v) => num(Number(v), 0) },
        },
      }
      chart.options.layout = { padding: { top: 24, right: 14 } }
      if (chart.width !== width || chart.height !== height) chart.resize(width, height)
      chart.update('none')
    },
    destroy(): void {
      chart.destroy()
    },
  }
}

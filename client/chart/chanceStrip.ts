import { Chart, type Plugin } from 'chart.js'
import { chance } from '../format.js'
import { drawPractice } from './pen.js'
import { haloText } from './scene.js'
import { frozenOptions } from './timeAxis.js'
import { band, bare, type Line, type TimeView } from './timeLines.js'
import { faded } from './tokens.js'
import type { Point } from './traces.js'

/** Chance of turning from now on, low and high side, with the site's limit. */
export const strip = (
  canvas: HTMLCanvasElement,
  seen: () => TimeView | null,
): Chart<'line', Point[]> => {
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

export const stripLines = (view: TimeView): Line[] => {
  const at = (k: 1 | 3) => view.readings.chance.map((f): Point => ({ x: f[0], y: f[k] }))
  const { colours } = view
  if (view.stale) return []
  return [
    ...band(at(1), at(3), faded(colours['mag-2'], 0.32)),
    { ...bare, data: at(3), borderColor: colours.mag, borderWidth: 2 },
    { ...bare, data: at(1), borderColor: colours.mag, borderWidth: 2, borderDash: [2, 3] },
  ]
}

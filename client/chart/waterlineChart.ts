import {
  Chart,
  LinearScale,
  LineController,
  LineElement,
  type Plugin,
  PointElement,
} from 'chart.js'
import { drawFrame, drawHead, drawScale, scaleWidth } from './heads.js'
import { drawFeet } from './laneFeet.js'
import { drawFold, drawLane } from './laneMarks.js'
import { drawPinned, drawTexts } from './laneTexts.js'
import { drawPractice } from './pen.js'
import { type Board, edges, type Scene, scale_K } from './scene.js'
import { drawIsobaths, drawLine, drawLineLabels, drawWater } from './water.js'

Chart.register(LinearScale, LineController, LineElement, PointElement)

/** What the window shows of the lanes: from `along` px on, and as many as fit. */
export type View = { readonly scene: Scene; readonly along: number }

const boardOf = (chart: Chart): Board | null => {
  const [x, y] = [chart.scales.x, chart.scales.y]
  if (x === undefined || y === undefined) return null
  const { left, right, top, bottom } = chart.chartArea
  return {
    ctx: chart.ctx,
    width: chart.width,
    height: chart.height,
    left,
    right,
    top,
    bottom,
    x: (along) => x.getPixelForValue(along),
    y: (margin) => y.getPixelForValue(Math.max(scale_K.bottom, Math.min(scale_K.top, margin))),
  }
}

const drawAll = (board: Board, scene: Scene): void => {
  const { ctx } = board
  ctx.save()
  const bays = scene.layout.bays.filter(
    (bay) => board.x(bay.x + bay.w) > board.left && board.x(bay.x) < board.right,
  )
  const parts = bays
    .flatMap((bay) => bay.parts)
    .filter((p) => board.x(p.x + p.w) > board.left - 60 && board.x(p.x) < board.right + 60)
  ctx.beginPath()
  ctx.rect(board.left - 1, 0, board.right - board.left + 2, board.height)
  ctx.clip()
  for (const bay of bays) drawWater(board, scene, bay)
  if (scene.practice) drawPractice(ctx, board, scene.say('practice.word'), scene.colours)
  for (const bay of bays) drawIsobaths(board, scene, bay)
  drawLine(board, scene)
  drawLineLabels(board, scene)
  for (const part of parts)
    if (part.kind === 'lane') drawLane(board, scene, part)
    else drawFold(board, scene, part)
  drawPinned(board, scene, parts)
  drawTexts(board, scene, parts)
  drawFeet(board, scene)
  for (const bay of bays) drawHead(board, scene, bay)
  for (const bay of bays) drawFrame(board, scene, bay)
  ctx.restore()
  drawScale(board, scene)
}

/**
 * The Waterline's canvas, at every size: Chart.js brings the two scales and the sharp canvas, the
 * plugin above draws. Nothing is redrawn unless `show` is called.
 */
export const waterlineChart = (canvas: HTMLCanvasElement) => {
  let view: View | null = null
  const painter: Plugin<'line'> = {
    id: 'waterline',
    afterDraw(chart) {
      // The cast: a plugin of a line chart is given the chart it was registered on.
      const board = boardOf(chart as unknown as Chart)
      if (board !== null && view !== null) drawAll(board, view.scene)
    },
  }
  const chart = new Chart(canvas, {
    type: 'line',
    data: { datasets: [] },
    options: {
      responsive: false,
      maintainAspectRatio: false,
      animation: false,
      events: [],
    },
    plugins: [painter],
  })
  return {
    /** Draws what is to be seen now. */
    show(next: View, width: number, height: number): void {
      view = next
      const { size } = next.scene
      chart.options.layout = {
        padding: {
          left: scaleWidth(size),
          right: edges.right,
          top: edges.head * (size > 1 ? 1.32 : 1),
          bottom: edges.foot * (size > 1 ? 1.32 : 1),
        },
      }
      // Given anew each time: bounds changed within the old options would be read too late.
      const bare = { type: 'linear', bounds: 'data', display: false } as const
      const seen = width - scaleWidth(size) - edges.right
      chart.options.scales = {
        x: { ...bare, min: next.along, max: next.along + seen },
        y: { ...bare, min: scale_K.bottom, max: scale_K.top },
      }
      if (chart.width !== width || chart.height !== height) chart.resize(width, height)
      chart.update('none')
    },
    destroy(): void {
      chart.destroy()
    },
  }
}

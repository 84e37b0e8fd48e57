import type { EvidenceKind, MarkKind } from '../shown.js'
import { evidenceShapes, type Part, shapes } from './shapes.js'
import type { Colours } from './tokens.js'

const paths = new Map<string, Path2D>()
const pathOf = (d: string): Path2D => {
  let path = paths.get(d)
  if (path === undefined) {
    path = new Path2D(d)
    paths.set(d, path)
  }
  return path
}

const drawPart = (
  ctx: CanvasRenderingContext2D,
  part: Part,
  colours: Colours,
  hollow: boolean,
): void => {
  const path = pathOf(part.d)
  if (part.fill !== undefined) {
    ctx.fillStyle = colours[hollow ? 'sheet' : part.fill]
    ctx.fill(path)
  }
  if (part.stroke !== undefined) {
    // Without its fill a sign in the fill's own contrast colour would vanish: it takes the edge's.
    ctx.strokeStyle = colours[hollow && part.stroke === 'on-red' ? 'edge' : part.stroke]
    ctx.lineWidth = part.width ?? 1
    ctx.setLineDash(part.dash === undefined ? [] : [...part.dash])
    ctx.stroke(path)
  }
}

/**
 * A standing's mark on its halo.
 *
 * @param hollow  without its fill: what is shown is old
 */
export const drawMark = (
  ctx: CanvasRenderingContext2D,
  kind: MarkKind,
  x: number,
  y: number,
  size: number,
  colours: Colours,
  hollow: boolean,
): void => {
  const shape = shapes[kind]
  ctx.save()
  ctx.translate(x, y)
  ctx.scale(size, size)
  ctx.lineJoin = 'round'
  ctx.lineCap = 'round'
  ctx.fillStyle = colours.halo
  ctx.fill(pathOf(shape.halo))
  for (const part of shape.parts) drawPart(ctx, part, colours, hollow)
  ctx.restore()
}

/** The mark of what a claim rests on, about its middle. */
export const drawEvidence = (
  ctx: CanvasRenderingContext2D,
  kind: EvidenceKind,
  x: number,
  y: number,
  size: number,
  colours: Colours,
): void => {
  ctx.save()
  ctx.translate(x, y)
  ctx.scale(size, size)
  for (const part of evidenceShapes[kind]) drawPart(ctx, part, colours, false)
  ctx.restore()
}

const patterns = new Map<string, CanvasPattern>()

/** A small tile repeated; drawn once per colour and kind. */
const patternOf = (
  ctx: CanvasRenderingContext2D,
  key: string,
  side: number,
  draw: (tile: CanvasRenderingContext2D) => void,
): CanvasPattern | string => {
  const known = patterns.get(key)
  if (known !== undefined) return known
  const tile = document.createElement('canvas')
  // Twice the size, so that the hatch is sharp on dense screens too.
  tile.width = side * 2
  tile.height = side * 2
  const pen = tile.getContext('2d')
  if (pen === null) return 'transparent'
  pen.scale(2, 2)
  draw(pen)
  const pattern = ctx.createPattern(tile, 'repeat')
  if (pattern === null) return 'transparent'
  pattern.setTransform(new DOMMatrix().scale(0.5))
  patterns.set(key, pattern)
  return pattern
}

/** White with ink hatching: ice. */
export const icePattern = (ctx: CanvasRenderingContext2D, colours: Colours) =>
  patternOf(ctx, `ice ${colours.ice} ${colours.ink}`, 10, (pen) => {
    pen.fillStyle = colours.ice
    pen.fillRect(0, 0, 10, 10)
    pen.strokeStyle = colours.ink
    pen.lineWidth = 1.6
    pen.beginPath()
    for (const at of [-10, 0, 10]) {
      pen.moveTo(at, 10)
      pen.lineTo(at + 10, 0)
    }
    pen.stroke()
  })

/** Dots: nothing can be said of this lane. */
export const blindPattern = (ctx: CanvasRenderingContext2D, colours: Colours) =>
  patternOf(ctx, `blind ${colours['ink-3']}`, 6, (pen) => {
    pen.fillStyle = colours['ink-3']
    pen.beginPath()
    pen.arc(1.5, 1.5, 0.9, 0, Math.PI * 2)
    pen.fill()
  })

/** Thin slanted lines: no readings here. */
export const gapPattern = (ctx: CanvasRenderingContext2D, colours: Colours) =>
  patternOf(ctx, `gap ${colours.rule}`, 8, (pen) => {
    pen.strokeStyle = colours.rule
    pen.lineWidth = 0.8
    pen.beginPath()
    for (const at of [-8, 0, 8]) {
      pen.moveTo(at, 8)
      pen.lineTo(at + 8, 0)
    }
    pen.stroke()
  })

/** A chevron at the edge: the true place lies beyond. */
export const drawChevron = (
  ctx: CanvasRenderingContext2D,
  x: number,
  y: number,
  down: boolean,
  size: number,
  colour: string,
): void => {
  const reach = (down ? 5 : -5) * size
  ctx.beginPath()
  ctx.moveTo(x - 4 * size, y)
  ctx.lineTo(x, y + reach)
  ctx.lineTo(x + 4 * size, y)
  ctx.setLineDash([])
  ctx.strokeStyle = colour
  ctx.lineWidth = 1.6 * size
  ctx.stroke()
}

/** PRACTICE behind a chart's figures, so that no picture of it passes for a real one. */
export const drawPractice = (
  ctx: CanvasRenderingContext2D,
  area: {
    readonly left: number
    readonly right: number
    readonly top: number
    readonly bottom: number
  },
  word: string,
  colours: Colours,
): void => {
  const w = area.right - area.left
  const h = area.bottom - area.top
  const px = Math.max(18, Math.min(w / 6, h / 3, 110))
  ctx.save()
  ctx.beginPath()
  ctx.rect(area.left, area.top, w, h)
  ctx.clip()
  ctx.translate(area.left + w / 2, area.top + h / 2)
  ctx.rotate(-Math.min(0.22, h / w / 1.5))
  ctx.font = `700 ${Math.round(px)}px ${colours.font}`
  ctx.textAlign = 'center'
  ctx.textBaseline = 'middle'
  ctx.globalAlpha = 0.1
  ctx.fillStyle = colours.red
  ctx.fillText(word, 0, 0)
  ctx.restore()
}

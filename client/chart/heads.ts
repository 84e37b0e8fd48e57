import { celsius, duration, num, signed } from '../format.js'
import { shownStanding } from '../shown.js'
import type { Bay } from './lanes.js'
import { type Board, edges, fitted, type Scene, scale_K, setFont } from './scene.js'

/** Somebody must act in this storage unit. */
const isRed = (bay: Bay): boolean =>
  bay.parts.some((part) => {
    if (part.kind === 'fold' || part.item.verdict.asIntended || part.item.verdict.heldBy !== null)
      return false
    const standing = shownStanding(part.item)
    return standing === 'Turned' || standing === 'Poised'
  })

/** The fullest line about the air that fits. */
const airLine = (board: Board, scene: Scene, bay: Bay, room: number): string => {
  const { air_C, airAt_ms, windows } = bay.unit
  const open = windows.find((w) => w.from_ms <= scene.now_ms && scene.now_ms < w.until_ms)
  const windowText = open === undefined ? null : scene.say(`window.${open.kind}`)
  if (air_C === null || airAt_ms === null) {
    const none = [scene.say('waterline.noAir'), '–']
    return none.find((text) => board.ctx.measureText(text).width <= room) ?? ''
  }
  const air = scene.say('waterline.air', { air: celsius(air_C) })
  const heard = scene.say('waterline.heard', { age: duration(scene.now_ms - airAt_ms) })
  const lines = [
    ...(windowText === null ? [] : [`${air} · ${windowText} · ${heard}`, `${air} · ${windowText}`]),
    `${air} · ${heard}`,
    air,
    celsius(air_C),
    celsius(air_C, 0),
    num(air_C, 0),
  ]
  return lines.find((text) => board.ctx.measureText(text).width <= room) ?? ''
}

/** A bay's head: what the storage unit is called, how cold its air is, how old that is. */
export const drawHead = (board: Board, scene: Scene, bay: Bay): void => {
  const { ctx } = board
  const { colours, size } = scene
  const x = board.x(bay.x)
  const top = 4
  ctx.fillStyle = colours.land
  ctx.fillRect(x, top, bay.w, board.top - top)
  if (isRed(bay)) {
    ctx.fillStyle = colours.red
    ctx.fillRect(x, top, bay.w, 5 * size)
  }
  const inset = bay.w < 70 * size ? 4 : 8
  // A bay that scrolls out of sight on the left keeps its name in sight as long as it can.
  const from = Math.max(x + inset, Math.min(board.left + inset, x + bay.w - 60 * size))
  const room = x + bay.w - from - 3
  ctx.textAlign = 'left'
  ctx.textBaseline = 'alphabetic'
  ctx.fillStyle = colours.ink
  setFont(board, scene, 15, 700)
  const id = fitted(ctx, bay.unit.id, room)
  ctx.fillText(id, from, top + 23 * size)
  const idWidth = ctx.measureText(`${id}  `).width
  setFont(board, scene, 12)
  ctx.fillStyle = colours['ink-2']
  if (bay.unit.name !== bay.unit.id && room - idWidth > 40)
    ctx.fillText(fitted(ctx, bay.unit.name, room - idWidth), from + idWidth, top + 23 * size)
  ctx.fillText(airLine(board, scene, bay, room), from, top + 41 * size)
}

export const drawFrame = (board: Board, scene: Scene, bay: Bay): void => {
  board.ctx.strokeStyle = scene.colours.ink
  board.ctx.lineWidth = 1
  board.ctx.setLineDash([])
  board.ctx.strokeRect(board.x(bay.x), 4, bay.w, board.bottom - 4)
}

/** The scale stays put at the left: figures, and a bar with one block per kelvin. */
export const drawScale = (board: Board, scene: Scene): void => {
  const { ctx } = board
  const { colours, size } = scene
  ctx.fillStyle = colours.sheet
  ctx.fillRect(0, 0, board.left - 0.5, board.height)
  const x = board.left - 9 * size
  for (let k = Math.ceil(scale_K.bottom); k < 6; k += 1) {
    ctx.fillStyle = k % 2 === 0 ? colours.sheet : colours.ink
    const [from, to] = [board.y(k + 1), board.y(k)]
    ctx.fillRect(x, from, 6 * size, to - from)
    ctx.strokeStyle = colours.ink
    ctx.lineWidth = 1
    ctx.setLineDash([])
    ctx.strokeRect(x, from, 6 * size, to - from)
  }
  ctx.textAlign = 'right'
  ctx.textBaseline = 'alphabetic'
  for (let k = -8; k <= 6; k += 2) {
    setFont(board, scene, 12, k === 0 ? 700 : 400)
    ctx.fillStyle = k === 0 ? colours.ink : colours['ink-2']
    ctx.fillText(signed(k, 0), board.left - 14 * size, board.y(k) + 4 * size)
  }
  setFont(board, scene, 12)
  ctx.fillStyle = colours['ink-2']
  ctx.fillText('K', board.left - 14 * size, board.top - 12)
  ctx.fillStyle = colours.ink
  const y = board.y(0)
  ctx.fillRect(x, y - size, 9 * size, 2 * size)
}

/** How far the scale reaches to the left, px. */
export const scaleWidth = (size: number): number => edges.left * (size > 1 ? 1.37 : 1)

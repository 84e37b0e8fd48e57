import { evidenceOf, needsRoom, shortPlace } from '../shown.js'
import type { Fold, Lane } from './lanes.js'
import { drawEvidence } from './pen.js'
import { type Board, fitted, type Scene, setFont } from './scene.js'

/** The place under a lane; where it is narrow, without what its storage unit is called. */
const footText = ({ ctx }: Board, { size }: Scene, part: Lane | Fold): string => {
  if (part.kind === 'fold') return `×${part.items.length}`
  const place = shortPlace(part.item.position)
  const room = Math.max(part.w - 2, 20 * size)
  if (ctx.measureText(place).width <= room) return place
  // `TK-2` in TK is 2, and `tray 5` is 5: the neighbours say what kind of place it is.
  const tail = place.startsWith(part.item.storageUnit)
    ? place.slice(part.item.storageUnit.length).replace(/^[\s-]+/, '')
    : (place.split(/[\s,]+/).find((word) => /\d/.test(word)) ?? place)
  const text = fitted(ctx, tail === '' ? place : tail, room)
  return text.length < 3 && text.endsWith('…') ? '' : text
}

/** The foot of a lane: what it rests on, and its place. Calm places give way where room is short. */
export const drawFeet = (board: Board, scene: Scene): void => {
  const { ctx } = board
  const { colours, size } = scene
  const parts = scene.layout.bays.flatMap((b) => b.parts)
  const seen = parts.filter((p) => board.x(p.x + p.w) > board.left && board.x(p.x) < board.right)
  for (const part of seen) {
    if (part.kind === 'fold') continue
    const x = board.x(part.x + part.w / 2)
    const scale = Math.min(size, (part.w - 2) / 12)
    drawEvidence(
      ctx,
      evidenceOf(part.item.verdict.evidence),
      x,
      board.bottom + 14 * size,
      scale,
      colours,
    )
  }
  ctx.textAlign = 'center'
  ctx.textBaseline = 'alphabetic'
  const taken: [number, number][] = []
  const bold = (part: Lane | Fold) =>
    part.kind === 'lane' && (needsRoom(part.mark) || part.mark === 'silent')
  for (const pass of [true, false]) {
    setFont(board, scene, 12, pass ? 700 : 400)
    ctx.fillStyle = pass ? colours.ink : colours['ink-2']
    for (const part of seen) {
      if (bold(part) !== pass) continue
      const text = footText(board, scene, part)
      const x = board.x(part.x + part.w / 2)
      const half = ctx.measureText(text).width / 2 + 0.7
      if (taken.some(([a, b]) => x - half < b && x + half > a)) continue
      taken.push([x - half, x + half])
      ctx.fillText(text, x, board.bottom + 35 * size)
    }
  }
}

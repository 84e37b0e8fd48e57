import type { ItemView } from '../../config/schema/api.js'
import type { Bay, Fold, Lane, Layout } from './lanes.js'

/** Positions take this long to change (look.md §4); nothing else moves. */
const move_ms = 160

type Place = { readonly x: number; readonly w: number }
const keyOf = (part: Lane | Fold): string => (part.kind === 'lane' ? part.item.id : part.key)

const placesOf = (layout: Layout): ReadonlyMap<string, Place> =>
  new Map<string, Place>([
    ...layout.bays.map((bay) => [`bay ${bay.unit.id}`, bay] as const),
    ...layout.bays.flatMap((bay) => bay.parts).map((part) => [keyOf(part), part] as const),
  ])

const between = (from: number, to: number, share: number): number => from + (to - from) * share

const moved = <T extends Place>(to: T, from: Place | undefined, share: number): T =>
  from === undefined
    ? to
    : { ...to, x: between(from.x, to.x, share), w: between(from.w, to.w, share) }

/** The layout on its way from where everything stood; what is new stands where it will be. */
const layoutBetween = (from: ReadonlyMap<string, Place>, to: Layout, share: number): Layout => ({
  width: to.width,
  bays: to.bays.map((bay): Bay => {
    const parts = bay.parts.map((part) => moved(part, from.get(keyOf(part)), share))
    return { ...moved(bay, from.get(`bay ${bay.unit.id}`), share), parts }
  }),
})

/**
 * Carries lanes and marks from where they stood to where they belong, in 160 ms or at once.
 *
 * @param draw  called with the layout and the margins of the moment
 */
export const motion = (
  draw: (layout: Layout, margin: (item: ItemView) => number | null) => void,
) => {
  let places: ReadonlyMap<string, Place> = new Map()
  let margins: ReadonlyMap<string, number> = new Map()
  let frame = 0

  const settle = (layout: Layout): void => {
    places = placesOf(layout)
    const items = layout.bays
      .flatMap((bay) => bay.parts)
      .flatMap((part) => (part.kind === 'lane' ? [part.item] : part.items))
    margins = new Map(
      items.flatMap((i) => (i.verdict.margin_K === null ? [] : [[i.id, i.verdict.margin_K]])),
    )
    draw(layout, (item) => item.verdict.margin_K)
  }

  return {
    to(layout: Layout, atOnce: boolean): void {
      cancelAnimationFrame(frame)
      if (atOnce || places.size === 0) {
        settle(layout)
        return
      }
      const [fromPlaces, fromMargins] = [places, margins]
      const start = performance.now()
      const step = (now: number): void => {
        const part = Math.min(1, Math.max(0, (now - start) / move_ms))
        if (part === 1) {
          settle(layout)
          return
        }
        const share = 1 - (1 - part) ** 3
        draw(layoutBetween(fromPlaces, layout, share), (item) => {
          const to = item.verdict.margin_K
          const from = fromMargins.get(item.id)
          return to === null || from === undefined ? to : between(from, to, share)
        })
        frame = requestAnimationFrame(step)
      }
      frame = requestAnimationFrame(step)
    },
    stop(): void {
      cancelAnimationFrame(frame)
    },
  }
}

import { effect, type Signal, useComputed, useSignal } from '@preact/signals'
import { useEffect, useRef } from 'preact/hooks'
import { scaleWidth } from '../chart/heads.js'
import { type Fold, type Lane, type LaneRules, lanesOf, layoutLanes } from '../chart/lanes.js'
import { motion } from '../chart/motion.js'
import { edges } from '../chart/scene.js'
import { readColours } from '../chart/tokens.js'
import { follow, itemPath } from '../route.js'
import { isPhone, isWall, reducedMotion } from '../screen.js'
import { laneLabel } from '../sentences.js'
import { now_ms, type Picture, stale } from '../site.js'
import { theme } from '../theme.js'
import { say } from '../words.js'

/** Least widths in px; a mark of 20 px may overlap its neighbour's halo, never its place. */
const rulesFor = (width: number, size: number, opened: ReadonlySet<string>): LaneRules => ({
  width: width - scaleWidth(size) - edges.right,
  least: 13 * size,
  comfortable: 17 * size,
  leastBay: 46 * size,
  gap: size > 1 ? 12 : 8,
  fixed: isPhone.value ? 48 : null,
  foldBeyond: 60,
  opened,
})

/** More lanes than these and positions change at once: the time belongs to the drawing. */
const moveAtMost = 300

type Box = { readonly width: number; readonly height: number }
const keyOf = (part: Lane | Fold): string => (part.kind === 'lane' ? part.item.id : part.key)

/**
 * The chart: one canvas, and over it a link for each lane in sight, so that pointer, touch and
 * keyboard reach what the canvas shows. Its accessible form is the table twin.
 *
 * @param known  the picture; on a phone of one storage unit only
 * @param near    tells which item is pointed at
 * @param opened  items whose strip somebody opened
 */
export const WaterlineChart = ({
  known,
  near,
  opened,
}: {
  known: Picture
  near: (id: string | null) => void
  opened: Signal<ReadonlySet<string>>
}) => {
  const frame = useRef<HTMLDivElement>(null)
  const canvas = useRef<HTMLCanvasElement>(null)
  const box = useSignal<Box>({ width: 0, height: 0 })
  const along = useSignal(0)
  const pointed = useSignal<string | null>(null)
  const current = useSignal<string | null>(null)
  const ready = useSignal(false)
  const latest = useSignal(known)
  latest.value = known
  const fonts = useSignal(0)

  const size = useComputed(() => (isWall.value ? 1.42 : 1))
  const layout = useComputed(() => {
    const { storageUnits, items, site } = latest.value
    // A lane under the keyboard is not folded away from under it.
    const open = new Set(opened.value)
    if (current.value !== null) open.add(current.value)
    const rules = rulesFor(Math.max(box.value.width, 240), size.value, open)
    return layoutLanes(storageUnits, items, site.policy, rules)
  })

  useEffect(() => {
    const element = frame.current
    if (element === null) return
    const measure = () => {
      box.value = { width: element.clientWidth, height: element.clientHeight }
    }
    const observer = new ResizeObserver(measure)
    observer.observe(element)
    measure()
    return () => observer.disconnect()
  }, [box])

  useEffect(() => {
    const element = canvas.current
    if (element === null) return
    let over = false
    let end = (): void => {}
    const fontsDone = () => {
      fonts.value += 1
    }
    document.fonts.addEventListener('loadingdone', fontsDone)
    void import('../chart/waterlineChart.js').then(({ waterlineChart }) => {
      if (over) return
      const chart = waterlineChart(element)
      let colours = readColours()
      let drawnTheme = theme.value
      const mover = motion((laid, margin) => {
        if (drawnTheme !== theme.value) {
          drawnTheme = theme.value
          colours = readColours()
        }
        const { site, asOf_ms } = latest.value
        const scene = {
          layout: laid,
          colours,
          size: size.value,
          asOf_ms,
          now_ms: now_ms.peek(),
          zone: site.zone,
          stale: stale.value !== null,
          practice: site.practice,
          near: pointed.value,
          margin,
          say,
        }
        chart.show({ scene, along: along.value }, box.value.width, box.value.height)
      })
      let drawn = layout.peek()
      const stop = effect(() => {
        const next = layout.value
        // Read here, so that a change of any of them draws again.
        const still =
          next === drawn || reducedMotion.value || latest.value.items.length > moveAtMost
        drawn = next
        void [theme.value, along.value, pointed.value, fonts.value, stale.value]
        if (box.value.width > 0 && box.value.height > 0) mover.to(next, still)
      })
      end = () => {
        stop()
        mover.stop()
        chart.destroy()
      }
      ready.value = true
    })
    return () => {
      over = true
      document.fonts.removeEventListener('loadingdone', fontsDone)
      end()
    }
  }, [along, box, fonts, latest, layout, pointed, ready, size])

  const left = scaleWidth(size.value)
  const parts = lanesOf(layout.value)
  const total = layout.value.width + left + edges.right
  const inSight = parts.filter(
    (p) => p.x + p.w > along.value - 60 && p.x < along.value + box.value.width - left + 60,
  )
  // The lane that Tab reaches: the one last stood on, or the first in sight.
  const stop = parts.find((p) => keyOf(p) === current.value) ?? inSight[0]

  const point = (part: Lane | Fold | null): void => {
    const id = part?.kind === 'lane' ? part.item.id : null
    pointed.value = id
    near(id)
  }

  const stand = (part: Lane | Fold | undefined): void => {
    const element = frame.current
    if (part === undefined || element === null) return
    current.value = keyOf(part)
    const width = box.value.width - left
    if (part.x < along.value) element.scrollLeft = part.x
    else if (part.x + part.w > along.value + width - edges.right)
      element.scrollLeft = part.x + part.w - width + edges.right + 8
    along.value = element.scrollLeft
    // After the links have been drawn anew, the one to stand on is there.
    requestAnimationFrame(() =>
      element.querySelector<HTMLElement>(`[data-lane="${CSS.escape(keyOf(part))}"]`)?.focus(),
    )
  }

  const onKeyDown = (event: KeyboardEvent): void => {
    const at = parts.findIndex((p) => keyOf(p) === current.value)
    const to = {
      ArrowRight: at + 1,
      ArrowDown: at + 1,
      ArrowLeft: at - 1,
      ArrowUp: at - 1,
      Home: 0,
      End: parts.length - 1,
    }[event.key]
    if (to === undefined) return
    event.preventDefault()
    stand(parts[Math.max(0, Math.min(parts.length - 1, to))])
  }

  const open = (fold: Fold): void => {
    opened.value = new Set([...opened.value, ...fold.items.map((i) => i.id)])
    const first = fold.items[0]?.id
    if (first === undefined) return
    current.value = first
    requestAnimationFrame(() =>
      frame.current?.querySelector<HTMLElement>(`[data-lane="${CSS.escape(first)}"]`)?.focus(),
    )
  }

  const headHeight = edges.head * (size.value > 1 ? 1.32 : 1)
  const placed = (part: Lane | Fold) => ({
    left: `${left + part.x - along.value}px`,
    width: `${part.w}px`,
    top: `${headHeight}px`,
  })

  return (
    <div
      class="waterline"
      ref={frame}
      onScroll={(event) => {
        along.value = event.currentTarget.scrollLeft
      }}
    >
      {/* biome-ignore lint/a11y/useSemanticElements: a fieldset is for a form's fields */}
      <div
        class="lanes"
        role="group"
        aria-label={say('waterline.chart')}
        style={{ width: total > box.value.width + 1 ? `${total}px` : '100%' }}
        onKeyDown={onKeyDown}
        onPointerLeave={() => point(null)}
      >
        <div class="stick" style={{ width: `${box.value.width}px` }}>
          <canvas ref={canvas} class={ready.value ? 'drawn' : ''} />
          {!ready.value && <p class="fetching">{say('loading.chart')}</p>}
          {inSight.map((part) => {
            const key = keyOf(part)
            const shared = {
              'data-lane': key,
              class: 'lane',
              style: placed(part),
              tabIndex: part === stop ? 0 : -1,
              onPointerEnter: () => point(part),
              onFocus: () => {
                current.value = key
                point(part)
              },
              onBlur: () => point(null),
            }
            return part.kind === 'lane' ? (
              <a
                key={key}
                {...shared}
                href={itemPath(part.item.id)}
                aria-label={laneLabel(part.item)}
                onClick={follow}
              />
            ) : (
              <button
                key={key}
                {...shared}
                type="button"
                aria-label={say('waterline.openFold', {
                  count: part.items.length,
                  unit: part.items[0]?.storageUnit ?? '',
                })}
                onClick={() => open(part)}
              />
            )
          })}
        </div>
      </div>
    </div>
  )
}

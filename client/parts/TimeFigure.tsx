import { effect, useComputed, useSignal } from '@preact/signals'
import { useEffect, useRef } from 'preact/hooks'
import type { ItemView } from '../../config/schema/api.js'
import { api, remedyOf } from '../api.js'
import { readColours } from '../chart/tokens.js'
import { clock, clockMinute, num, offset } from '../format.js'
import { isPhone } from '../screen.js'
import { markOf } from '../shown.js'
import { type Picture, stale } from '../site.js'
import { theme } from '../theme.js'
import { say } from '../words.js'
import { ReadingsTable } from './ReadingsTable.js'
import { ahead_ms, behind_ms, minute_ms, panned, type Span, zoomed } from './span.js'
import { TimeLegend } from './TimeLegend.js'
import { useAsked } from './useAsked.js'
import { useFontsLoaded, useWidth } from './useCanvasBox.js'

/** Points asked for: more than a screen has pixels would not be seen. */
const points = 1500

/** What was read and what the product is reckoned to be, over time; the same as a table. */
export const TimeFigure = ({ item, known }: { item: ItemView; known: Picture }) => {
  const box = useRef<HTMLDivElement>(null)
  const temperature = useRef<HTMLCanvasElement>(null)
  const chance = useRef<HTMLCanvasElement>(null)
  const width = useWidth(box)
  const fonts = useFontsLoaded()
  const span = useSignal<Span>(null)
  const drag = useSignal<{ from: number; to: number } | null>(null)
  const table = useSignal(false)
  const chart = useRef<{
    timeAt(px: number): number
  } | null>(null)

  // Followed in steps of five minutes, so that the axis does not crawl with every batch.
  const step_ms = 5 * minute_ms
  const followed_ms = Math.ceil(known.asOf_ms / step_ms) * step_ms
  const seen = span.value ?? {
    from_ms: followed_ms - behind_ms,
    until_ms: followed_ms + ahead_ms,
  }
  const what = `${item.id} ${span.value === null ? 'now' : `${seen.from_ms}…${seen.until_ms}`}`
  const asked = useAsked(
    () => api.readings(item.id, { ...seen, points }),
    item.id,
    span.value === null ? item.verdict.t : what,
  )
  const readings = asked.kind === 'here' ? asked.value : null
  const latest = useSignal({ item, known, readings, seen })
  latest.value = { item, known, readings, seen }
  const phone = isPhone.value
  const heights = useComputed((): [number, number] => (isPhone.value ? [270, 112] : [360, 112]))

  useEffect(() => {
    let over = false
    let end = (): void => {}
    void import('../chart/timeChart.js').then(({ timeChart }) => {
      if (over || temperature.current === null || chance.current === null) return
      const drawn = timeChart(temperature.current, chance.current)
      chart.current = drawn
      const stop = effect(() => {
        const { item: of, known: at, readings: given, seen: shown } = latest.value
        void [theme.value, fonts.value]
        if (width.value === 0 || given === null) return
        const { policy } = at.site
        drawn.show(
          {
            item: of,
            mark: markOf(of, policy),
            readings: given,
            ...shown,
            now_ms: at.asOf_ms,
            zone: at.site.zone,
            colours: readColours(),
            practice: at.site.practice,
            stale: stale.value !== null,
            narrow: width.value < 520,
            limit: {
              chance: policy.poisedChance,
              text: say(width.value < 520 ? 'chart.limitShort' : 'chart.limit', {
                chance: num(policy.poisedChance * 100, 0),
                hours: num(policy.poisedHorizon_h, 0),
                quantile: say(`quantile.${policy.chanceQuantile}`),
              }),
            },
            say,
          },
          width.value,
          heights.value,
        )
        // For whoever waits for the drawing; not a signal, or drawing would cause drawing.
        if (box.current !== null) box.current.dataset.drawn = of.verdict.t
      })
      end = () => {
        stop()
        drawn.destroy()
        chart.current = null
      }
    })
    return () => {
      over = true
      end()
    }
  }, [fonts, heights, latest, width])

  const place = (event: PointerEvent): number =>
    event.clientX - (temperature.current?.getBoundingClientRect().left ?? 0)

  const finish = (): void => {
    const pulled = drag.value
    drag.value = null
    if (pulled === null || Math.abs(pulled.to - pulled.from) < 8 || chart.current === null) return
    const [a, b] = [pulled.from, pulled.to].map((px) => chart.current?.timeAt(px) ?? 0) as [
      number,
      number,
    ]
    span.value = zoomed({ from_ms: Math.min(a, b), until_ms: Math.max(a, b) }, 1)
  }

  const act: Readonly<Record<string, () => Span>> = {
    ArrowLeft: () => panned(seen, -0.25),
    ArrowRight: () => panned(seen, 0.25),
    '+': () => zoomed(seen, 0.5),
    '-': () => zoomed(seen, 2),
    '0': () => null,
    Home: () => null,
  }
  const onKeyDown = (event: KeyboardEvent): void => {
    const next = act[event.key]
    if (next === undefined || event.ctrlKey || event.metaKey || event.altKey) return
    event.preventDefault()
    span.value = next()
  }

  const zone = known.site.zone
  const described = say('chart.described', {
    from: clock(seen.from_ms, zone),
    until: clock(seen.until_ms, zone),
  })
  return (
    <section class="chart time-figure" aria-label={say('chart.title')}>
      <header>
        <h2>{say(phone ? 'chart.titleShort' : 'chart.title')}</h2>
        <small>
          {say('chart.zone', { offset: offset(known.asOf_ms, zone) })}
          {!phone && ` · ${say('chart.howTo')}`}
        </small>
        {/* biome-ignore lint/a11y/useSemanticElements: buttons, not a form's fields */}
        <div class="seg" role="group" aria-label={say('chart.form')}>
          <button type="button" aria-pressed={!table.value} onClick={() => (table.value = false)}>
            {say('waterline.asChart')}
          </button>
          <button type="button" aria-pressed={table.value} onClick={() => (table.value = true)}>
            {say('waterline.asTable')}
          </button>
        </div>
      </header>
      <div class="tools">
        {(
          [
            ['ArrowLeft', 'chart.earlier', '←'],
            ['ArrowRight', 'chart.later', '→'],
            ['+', 'chart.closer', '+'],
            ['-', 'chart.wider', '−'],
          ] as const
        ).map(([key, words, sign]) => (
          <button
            key={key}
            type="button"
            aria-label={say(words)}
            title={say(words)}
            onClick={() => (span.value = act[key]?.() ?? null)}
          >
            {sign}
          </button>
        ))}
        <button
          type="button"
          aria-pressed={span.value === null}
          onClick={() => (span.value = null)}
        >
          {say('chart.follow')}
        </button>
        <span class="dim num">
          {clockMinute(seen.from_ms, zone)}–{clockMinute(seen.until_ms, zone)}
        </span>
      </div>
      {asked.kind === 'failed' && (
        <p class="note red" role="alert">
          {remedyOf(asked.error, say('error.unreachable'))}
        </p>
      )}
      {table.value && readings !== null && (
        <ReadingsTable readings={readings} seen={seen} zone={zone} now_ms={known.asOf_ms} />
      )}
      <div class={table.value ? 'canvases away' : 'canvases'} ref={box}>
        {readings === null && asked.kind !== 'failed' && (
          <p class="fetching">
            {say('loading.readings', { time: clockMinute(seen.from_ms, zone) })}
          </p>
        )}
        {/* The plot takes the keys: it is moved and zoomed as a whole. */}
        <div
          class="plot"
          role="img"
          aria-label={described}
          // biome-ignore lint/a11y/noNoninteractiveTabindex: it takes the keys
          tabIndex={0}
          onKeyDown={onKeyDown}
          onDblClick={() => (span.value = null)}
          onPointerDown={(event) => {
            if (event.pointerType !== 'mouse' || event.button !== 0) return
            event.currentTarget.setPointerCapture(event.pointerId)
            drag.value = { from: place(event), to: place(event) }
          }}
          onPointerMove={(event) => {
            if (drag.value !== null) drag.value = { ...drag.value, to: place(event) }
          }}
          onPointerUp={finish}
          onPointerCancel={() => (drag.value = null)}
        >
          <canvas ref={temperature} />
          {drag.value !== null && (
            <i
              class="pull"
              style={{
                left: `${Math.min(drag.value.from, drag.value.to)}px`,
                width: `${Math.abs(drag.value.to - drag.value.from)}px`,
              }}
            />
          )}
        </div>
        <h2 class="under">{say('chart.chance')}</h2>
        <div class="plot" role="img" aria-label={say('chart.chanceDescribed')}>
          <canvas ref={chance} />
        </div>
        <p class="small">
          {item.verdict.chance === null
            ? say('chance.none')
            : say('chance.rests', { basis: item.verdict.chance.basis.replace(/\.$/, '') })}
        </p>
      </div>
      {!table.value && <TimeLegend readings={readings} />}
      <p class="unseen" aria-live="polite">
        {span.value === null ? '' : described}
      </p>
    </section>
  )
}

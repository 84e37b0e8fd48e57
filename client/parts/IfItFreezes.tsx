import { effect, useSignal } from '@preact/signals'
import { useEffect, useRef } from 'preact/hooks'
import type { ItemCurves, ItemView } from '../../config/schema/api.js'
import { remedyOf } from '../api.js'
import { readColours } from '../chart/tokens.js'
import { celsius, hours, interval, kelvin, num, rough } from '../format.js'
import { markOf } from '../shown.js'
import type { Picture } from '../site.js'
import { theme } from '../theme.js'
import { say } from '../words.js'
import type { Asked } from './useAsked.js'
import { useFontsLoaded, useWidth } from './useCanvasBox.js'

/** The two curves and the jump between them. */
const Curves = ({
  item,
  known,
  curves,
}: {
  item: ItemView
  known: Picture
  curves: ItemCurves
}) => {
  const box = useRef<HTMLDivElement>(null)
  const canvas = useRef<HTMLCanvasElement>(null)
  const width = useWidth(box)
  const fonts = useFontsLoaded()
  const latest = useSignal({ item, known, curves })
  latest.value = { item, known, curves }
  useEffect(() => {
    let over = false
    let end = (): void => {}
    void import('../chart/curvesChart.js').then(({ curvesChart }) => {
      if (over || canvas.current === null) return
      const chart = curvesChart(canvas.current)
      const stop = effect(() => {
        void [theme.value, fonts.value]
        const { item: of, known: at, curves: given } = latest.value
        if (width.value === 0) return
        const view = {
          curves: given,
          mark: markOf(of, at.site.policy),
          colours: readColours(),
          practice: at.site.practice,
          say,
        }
        chart.show(view, width.value, 280)
      })
      end = () => {
        stop()
        chart.destroy()
      }
    })
    return () => {
      over = true
      end()
    }
  }, [fonts, latest, width])
  const { jump } = curves
  const label =
    jump === null
      ? say('curves.describedNoJump')
      : say('curves.described', { from: celsius(jump.from_C), to: celsius(jump.end_C, 2) })
  return (
    <div class="plot curves" role="img" aria-label={label} ref={box}>
      <canvas ref={canvas} />
    </div>
  )
}

const Row = ({ term, figure, note }: { term: string; figure: string; note?: string }) => (
  <div>
    <dt>{term}</dt>
    <dd>
      {figure}
      {note !== undefined && note !== '' && <small>{note}</small>}
    </dd>
  </div>
)

const Figures = ({ item }: { item: ItemView }) => {
  const { verdict } = item
  const f = verdict.ifItFreezes
  if (f !== null && f.jump_K < 0.005) return <p class="pad">{say('freezes.notBelow')}</p>
  if (f === null) return <p class="pad">{say('freezes.unknown')}</p>
  const rises = (r: readonly [number, number, number] | null) => {
    if (r === null) return say('frame.unknown')
    return r[2] < 0.01 ? say('freezes.hardly') : `${interval(r[0], r[2], r[2] < 1 ? 2 : 1)} K`
  }
  return (
    <dl class="out">
      <Row
        term={say('freezes.jumpsTo')}
        figure={celsius(f.end_C, 2)}
        note={say('freezes.jump', { jump: kelvin(f.jump_K) })}
      />
      <Row
        term={say('freezes.firstIce')}
        figure={`${num(f.firstIce_kg_kg * 100)} %`}
        note={say('freezes.ofContents')}
      />
      <Row
        term={say('freezes.heatNow')}
        figure={`${rough(f.heatNow_kJ)} kJ`}
        note={say('freezes.perContainer')}
      />
      <Row
        term={say('freezes.heatToSolid')}
        figure={
          f.heatToSolid_kJ === null ? say('freezes.notSolid') : `${rough(f.heatToSolid_kJ)} kJ`
        }
        note={f.heatToSolid_kJ === null ? '' : say('freezes.perContainer')}
      />
      {f.solid_h !== null && (
        <Row
          term={say('freezes.solid')}
          figure={hours(f.solid_h[0], f.solid_h[2])}
          note={say('freezes.airAsNow')}
        />
      )}
      {f.settlesAt_kg_kg !== null && (
        <Row
          term={say('freezes.settlesAt')}
          figure={say('freezes.ice', { ice: num(f.settlesAt_kg_kg * 100, 0) })}
          note={
            f.settle_h === null
              ? ''
              : say('freezes.settleIn', { span: hours(f.settle_h[0], f.settle_h[2]) })
          }
        />
      )}
      <Row
        term={say('freezes.airRise')}
        figure={rises(f.airRise_K)}
        note={
          item.count > 1
            ? say('freezes.airRiseAll', { count: item.count, rise: rises(f.airRise_all_K) })
            : ''
        }
      />
      <Row term={say('freezes.neighbourRise')} figure={rises(f.neighbourRise_K)} />
    </dl>
  )
}

/** What happens if ice nucleates now: the picture, and the same in figures. */
export const IfItFreezes = ({
  item,
  known,
  asked,
}: {
  item: ItemView
  known: Picture
  asked: Asked<ItemCurves>
}) => (
  <section class="panel freezes" aria-label={say('freezes.title')}>
    <header>
      <h2>{say('freezes.title')}</h2>
      <small>{say('freezes.one')}</small>
    </header>
    {asked.kind === 'here' && <Curves item={item} known={known} curves={asked.value} />}
    {asked.kind === 'asking' && <p class="fetching">{say('loading.curves')}</p>}
    {asked.kind === 'failed' && (
      <p class="note red">{remedyOf(asked.error, say('error.unreachable'))}</p>
    )}
    <Figures item={item} />
  </section>
)

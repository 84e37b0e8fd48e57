import { useSignal } from '@preact/signals'
import { useEffect } from 'preact/hooks'
import { HandsNeeded } from '../parts/HandsNeeded.js'
import { Key } from '../parts/Key.js'
import { Mark } from '../parts/Marks.js'
import { TwinTable } from '../parts/TwinTable.js'
import { WaterlineChart } from '../parts/WaterlineChart.js'
import { asTable, isPhone, isWall, showTable } from '../screen.js'
import { readout } from '../sentences.js'
import { type MarkKind, markOf } from '../shown.js'
import { itemById, now_ms, type Picture, picture } from '../site.js'
import { say } from '../words.js'

const isTyping = (event: KeyboardEvent): boolean =>
  event.target instanceof HTMLElement &&
  (event.target.isContentEditable || /^(INPUT|SELECT|TEXTAREA)$/.test(event.target.tagName))

const Switch = () => (
  // biome-ignore lint/a11y/useSemanticElements: two buttons, not a form's fields
  <div class="seg" role="group" aria-label={say('waterline.form')}>
    <button type="button" aria-pressed={!asTable.value} onClick={() => showTable(false)}>
      {say('waterline.asChart')}
    </button>
    <button type="button" aria-pressed={asTable.value} onClick={() => showTable(true)}>
      {say('waterline.asTable')} {!isPhone.value && <kbd>T</kbd>}
    </button>
  </div>
)

const worst: readonly MarkKind[] = ['turned', 'poised', 'below', 'near', 'silent']

/** The most pressing mark of each storage unit, for its chip on a phone. */
const worstByUnit = (known: Picture): ReadonlyMap<string, MarkKind> => {
  const found = new Map<string, MarkKind>()
  for (const item of known.items) {
    const kind = markOf(item, known.site.policy)
    const rank = worst.indexOf(kind)
    const before = found.get(item.storageUnit)
    if (rank >= 0 && (before === undefined || rank < worst.indexOf(before)))
      found.set(item.storageUnit, kind)
  }
  return found
}

/** The storage unit with the most pressing mark; the first where nothing presses. */
const firstToSee = (known: Picture, marks: ReadonlyMap<string, MarkKind>): string => {
  const pressing = worst
    .map((kind) => known.storageUnits.find((u) => marks.get(u.id) === kind)?.id)
    .find((id) => id !== undefined)
  return pressing ?? known.storageUnits[0]?.id ?? ''
}

/** On a phone one bay is shown; the chips name them all, each with its worst mark. */
const Bays = ({
  known,
  marks,
  chosen,
  choose,
}: {
  known: Picture
  marks: ReadonlyMap<string, MarkKind>
  chosen: string
  choose: (id: string) => void
}) => (
  <nav class="bays" aria-label={say('waterline.bays')}>
    {known.storageUnits.map((unit) => {
      const kind = marks.get(unit.id)
      return (
        <button
          key={unit.id}
          type="button"
          aria-pressed={unit.id === chosen}
          onClick={() => choose(unit.id)}
        >
          {unit.id}
          {kind !== undefined && <Mark kind={kind} size={18} />}
          {kind !== undefined && <span class="unseen">, {say(`mark.${kind}`)}</span>}
        </button>
      )
    })}
  </nav>
)

const onlyUnit = (known: Picture, unit: string): Picture => ({
  ...known,
  storageUnits: known.storageUnits.filter((u) => u.id === unit),
  items: known.items.filter((i) => i.storageUnit === unit),
})

/** Every stored item against its own freezing line. */
export const Waterline = () => {
  const known = picture.value
  const near = useSignal<string | null>(null)
  const chosen = useSignal<string | null>(null)
  const opened = useSignal<ReadonlySet<string>>(new Set())
  const phone = isPhone.value
  useEffect(() => {
    const onKey = (event: KeyboardEvent): void => {
      if (event.key.toLowerCase() !== 't' || event.ctrlKey || event.metaKey || event.altKey) return
      if (!isTyping(event)) showTable(!asTable.value)
    }
    addEventListener('keydown', onKey)
    return () => removeEventListener('keydown', onKey)
  }, [])
  if (known === null) return null
  const at = { now_ms: now_ms.value, zone: known.site.zone }
  const item = near.value === null ? undefined : itemById.value.get(near.value)
  const hint = asTable.value
    ? say('waterline.tableHint')
    : item === undefined
      ? say('waterline.hint')
      : readout(item, at)
  // Only a phone shows one bay at a time; elsewhere nobody asks which.
  const marks = phone ? worstByUnit(known) : new Map<string, MarkKind>()
  const unit = phone ? (chosen.value ?? firstToSee(known, marks)) : ''
  return (
    <div class="waterline-view">
      <section class="left" aria-label={say('view.waterline')}>
        <header>
          <h1>{say('view.waterline')}</h1>
          {!phone && <p class={`hint ${item === undefined ? 'dim' : ''}`}>{hint}</p>}
          {opened.value.size > 0 && !asTable.value && !phone && (
            <button type="button" class="plain" onClick={() => (opened.value = new Set())}>
              {say('waterline.foldAgain')}
            </button>
          )}
          {!isWall.value && <Switch />}
        </header>
        {phone && !asTable.value && (
          <Bays known={known} marks={marks} chosen={unit} choose={(id) => (chosen.value = id)} />
        )}
        <div class="chart">
          {asTable.value ? (
            <TwinTable />
          ) : (
            <WaterlineChart
              known={phone ? onlyUnit(known, unit) : known}
              near={(id) => (near.value = id)}
              opened={opened}
            />
          )}
        </div>
        {!asTable.value && <Key />}
      </section>
      {!phone && <HandsNeeded />}
    </div>
  )
}

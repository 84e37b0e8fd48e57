import { computed, signal } from '@preact/signals'

/** Under this width the screen is a phone's: one thing at a time, a bar at the bottom. */
const phone = matchMedia('(max-width: 699px)')
/** A large screen that nobody can point at hangs on a wall. */
const wideAndUntouched = matchMedia('(min-width: 1800px) and (hover: none)')
const still = matchMedia('(prefers-reduced-motion: reduce)')

const watched = (query: MediaQueryList) => {
  const matches = signal(query.matches)
  query.addEventListener('change', (event) => {
    matches.value = event.matches
  })
  return matches
}

export const isPhone = watched(phone)
export const reducedMotion = watched(still)
const untouched = watched(wideAndUntouched)

/** `?wall` makes any screen a wall display: larger, and nothing to press. */
const asked = new URLSearchParams(location.search).has('wall')
export const isWall = computed(() => asked || untouched.value)

/** Chart or table: `?view=table` keeps the choice in the address, so that it can be linked. */
export const asTable = signal(new URLSearchParams(location.search).get('view') === 'table')

export const showTable = (table: boolean): void => {
  asTable.value = table
  const search = new URLSearchParams(location.search)
  if (table) search.set('view', 'table')
  else search.delete('view')
  const text = search.toString()
  history.replaceState(null, '', `${location.pathname}${text === '' ? '' : `?${text}`}`)
}

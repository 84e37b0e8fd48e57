import { computed, signal } from '@preact/signals'

/** Where the address bar stands. */
export const path = signal(location.pathname)

addEventListener('popstate', () => {
  path.value = location.pathname
})

/** Goes to a view of ours; the back button brings the reader back. */
export const go = (to: string): void => {
  if (to === path.value) return
  history.pushState(null, '', to)
  path.value = to
  scrollTo(0, 0)
}

/** For a link's click: leaves new tabs and other buttons to the browser. */
export const follow = (event: MouseEvent): void => {
  const link = event.currentTarget as HTMLAnchorElement
  if (event.button !== 0 || event.metaKey || event.ctrlKey || event.shiftKey || event.altKey) return
  event.preventDefault()
  go(link.pathname)
}

export const itemPath = (id: string): string => `/items/${encodeURIComponent(id)}`

/** The view that the address names; anything unknown is said to be so, not guessed. */
export type Route =
  | { readonly view: 'waterline' }
  | { readonly view: 'hands' }
  | { readonly view: 'probes' }
  | { readonly view: 'more' }
  | { readonly view: 'item'; readonly id: string }
  | { readonly view: 'unknown' }

const decode = (text: string): string => {
  try {
    return decodeURIComponent(text)
  } catch {
    return text // a stray % sign in the address: look for the item as it stands
  }
}

export const routeOf = (at: string): Route => {
  if (at === '/') return { view: 'hands' }
  if (at === '/waterline') return { view: 'waterline' }
  if (at === '/probes') return { view: 'probes' }
  if (at === '/more') return { view: 'more' }
  const item = /^\/items\/([^/]+)\/?$/.exec(at)
  if (item?.[1] !== undefined) return { view: 'item', id: decode(item[1]) }
  return { view: 'unknown' }
}

export const route = computed(() => routeOf(path.value))

import { useSignal } from '@preact/signals'
import { useEffect, useRef } from 'preact/hooks'

export type Asked<T> =
  | { readonly kind: 'asking' }
  | { readonly kind: 'failed'; readonly error: unknown }
  | { readonly kind: 'here'; readonly value: T }

/** Figures of one item are asked for at most this often, however fast verdicts change. */
const least_ms = 2_000

/**
 * Asks the server, and asks again when what was answered has grown old. While a newer answer is
 * under way the old one stays: a screen that blinks cannot be read.
 *
 * @param what   names the thing asked for; when it changes, the old answer is dropped
 * @param fresh  changes when a newer answer is to be had
 */
export const useAsked = <T>(
  ask: () => Promise<T>,
  what: string,
  fresh: string | number,
): Asked<T> => {
  const state = useSignal<Asked<T>>({ kind: 'asking' })
  const about = useRef('')
  const last = useRef({ started_ms: 0, turn: 0 })
  if (about.current !== what) {
    about.current = what
    last.current = { started_ms: 0, turn: last.current.turn + 1 }
    state.value = { kind: 'asking' }
  }
  // `fresh` is read by nothing here: that it changed is why this asks again.
  useEffect(() => {
    const turn = last.current.turn
    const start = (): void => {
      last.current.started_ms = Date.now()
      ask().then(
        (value) => {
          if (last.current.turn === turn) state.value = { kind: 'here', value }
        },
        (error: unknown) => {
          // An answer that is here already is better than none: it says how old it is.
          if (last.current.turn === turn && state.peek().kind !== 'here')
            state.value = { kind: 'failed', error }
        },
      )
    }
    const wait = last.current.started_ms + least_ms - Date.now()
    if (wait <= 0) {
      start()
      return
    }
    const timer = setTimeout(start, wait)
    return () => clearTimeout(timer)
  }, [what, fresh])
  return state.value
}

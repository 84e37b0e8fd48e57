import { type Signal, useSignal } from '@preact/signals'
import type { RefObject } from 'preact'
import { useEffect } from 'preact/hooks'

/** Width of an element, px, followed as it changes; 0 until it is known. */
export const useWidth = (element: RefObject<HTMLElement | null>): Signal<number> => {
  const width = useSignal(0)
  useEffect(() => {
    const box = element.current
    if (box === null) return
    const measure = () => {
      width.value = box.clientWidth
    }
    const observer = new ResizeObserver(measure)
    observer.observe(box)
    measure()
    return () => observer.disconnect()
  }, [element, width])
  return width
}

/** Counts the fonts that have come: a canvas drawn before that bears another font. */
export const useFontsLoaded = (): Signal<number> => {
  const count = useSignal(0)
  useEffect(() => {
    const done = () => {
      count.value += 1
    }
    document.fonts.addEventListener('loadingdone', done)
    return () => document.fonts.removeEventListener('loadingdone', done)
  }, [count])
  return count
}

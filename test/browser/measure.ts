import { launchBrowser } from './chromium.js'
import { startFixture } from './fixture.js'

export type WaterlineMeasure = {
  readonly items: number
  readonly changesPerSecond: number
  /** Median of the frame rates of whole seconds, with and without changes. */
  readonly framesPerSecond: number
  readonly idleFramesPerSecond: number
  readonly longestTask_ms: number
}

const median = (values: readonly number[]): number =>
  [...values].sort((a, b) => a - b)[Math.floor(values.length / 2)] ?? 0

/**
 * Frames a second of the Waterline while items change, against the same page at rest: the goal is
 * at least 0.9 of the idle rate (architecture.md §6). Two batches a second, as the feed sends them.
 *
 * @param copies   of the fixture's sixty items; 84 make 5,040
 * @param seconds  measured for each of the two rates
 */
export const measureWaterline = async (
  copies = 84,
  changesPerSecond = 1000,
  seconds = 8,
): Promise<WaterlineMeasure> => {
  const site = await startFixture({ copies })
  const browser = await launchBrowser()
  try {
    const page = await browser.newPage({ viewport: { width: 1440, height: 900 } })
    await page.goto(site.url)
    await page.waitForSelector('.stick canvas.drawn')
    const items = await page.evaluate(async () => {
      const answer = await fetch('/api/v1/items')
      return ((await answer.json()) as { items: unknown[] }).items.length
    })
    const rates = (): Promise<{ rates: number[]; longest: number }> =>
      page.evaluate(
        (wanted) =>
          new Promise((resolve) => {
            const found: number[] = []
            let longest = 0
            const watcher = new PerformanceObserver((list) => {
              for (const task of list.getEntries()) longest = Math.max(longest, task.duration)
            })
            watcher.observe({ type: 'longtask' })
            let frames = 0
            let since = performance.now()
            const step = (now: number): void => {
              frames += 1
              if (now - since >= 1000) {
                found.push((1000 * frames) / (now - since))
                frames = 0
                since = now
              }
              if (found.length < wanted) requestAnimationFrame(step)
              else {
                watcher.disconnect()
                resolve({ rates: found, longest })
              }
            }
            requestAnimationFrame(step)
          }),
        seconds,
      )
    const idle = await rates()
    const timer = setInterval(() => site.change(changesPerSecond / 2), 500)
    const busy = await rates()
    clearInterval(timer)
    return {
      items,
      changesPerSecond,
      framesPerSecond: median(busy.rates),
      idleFramesPerSecond: median(idle.rates),
      longestTask_ms: busy.longest,
    }
  } finally {
    await browser.close()
    await site.close()
  }
}

import { execFileSync } from 'node:child_process'
import { readFileSync } from 'node:fs'
import { join } from 'node:path'
import type { Browser, Page } from 'playwright-core'
import { afterAll, afterEach, beforeAll, expect, test } from 'vitest'
import screen from '../../config/words/en/screen.json' with { type: 'json' }
import { launchBrowser } from './chromium.js'
import { type Fixture, type FixtureOptions, startFixture } from './fixture.js'
import { rootFolder } from './root.js'

const axe = readFileSync(join(rootFolder(), 'node_modules', 'axe-core', 'axe.min.js'), 'utf8')

let browser: Browser
const open: { close(): Promise<void> }[] = []

beforeAll(async () => {
  execFileSync(process.execPath, ['config/tools/ensure-build.mjs', 'client'], {
    cwd: rootFolder(),
    stdio: 'inherit',
  })
  browser = await launchBrowser()
})
afterAll(() => browser.close())
afterEach(async () => {
  for (const one of open.splice(0).reverse()) await one.close()
})

type Look = {
  readonly width?: number
  readonly height?: number
  readonly theme?: 'light' | 'dark'
  readonly still?: boolean
}

/** A page on the fixture; whatever it complains about fails the test that opened it. */
const visit = async (
  path: string,
  look: Look = {},
  options: FixtureOptions = {},
): Promise<{ page: Page; site: Fixture; complaints: string[] }> => {
  const site = await startFixture(options)
  open.push(site)
  const context = await browser.newContext({
    viewport: { width: look.width ?? 1440, height: look.height ?? 900 },
    colorScheme: look.theme ?? 'light',
    reducedMotion: look.still === false ? 'no-preference' : 'reduce',
  })
  open.push(context)
  const page = await context.newPage()
  const complaints: string[] = []
  page.on('pageerror', (error) => complaints.push(error.message))
  page.on('console', (message) => {
    if (message.type() === 'error') complaints.push(message.text())
  })
  await page.goto(site.url + path)
  return { page, site, complaints }
}

/** Waits until a view has drawn what it draws. */
const drawn = async (page: Page, path: string): Promise<void> => {
  if (path.startsWith('/items/')) {
    await page.waitForSelector('.canvases[data-drawn]')
    await page.waitForSelector('.trail li')
  } else if (path === '/probes') await page.waitForSelector('text=Refused payloads')
  else if (path.includes('table')) await page.waitForSelector('.twin tbody tr')
  else if (path === '/more') await page.waitForSelector('.more-view')
  else await page.waitForSelector('.hand, .stick canvas.drawn')
}

const views = [
  ['Waterline', '/'],
  ['table twin', '/?view=table'],
  ['Item sheet of a turned item', '/items/CR-2-shelf-B2'],
  ['Item sheet of a poised item', '/items/CR-2-shelf-B5'],
  ['Item sheet of a silent item', '/items/CR-3-shelf-D2'],
  ['Probes', '/probes'],
] as const

type AxeResult = { violations: { id: string; nodes: { html: string; failureSummary: string }[] }[] }

const violationsOf = async (page: Page): Promise<string[]> => {
  await page.evaluate(axe)
  const result = (await page.evaluate(
    "axe.run(document, { runOnly: ['wcag2a', 'wcag2aa', 'wcag21a', 'wcag21aa', 'wcag22aa'] })",
  )) as AxeResult
  return result.violations.flatMap((v) =>
    v.nodes.map((n) => `${v.id}: ${n.html} ${n.failureSummary}`),
  )
}

for (const theme of ['light', 'dark'] as const)
  test.each(views)(`axe finds nothing against WCAG 2.2 AA on the %s, ${theme}`, async (_, path) => {
    const { page, complaints } = await visit(path, { theme })
    await drawn(page, path)
    expect(await violationsOf(page)).toEqual([])
    expect(complaints).toEqual([])
  })

const onPhone: readonly (readonly [string, string])[] = [
  ['Hands', '/'],
  ['Waterline', '/waterline'],
  ['table twin', '/waterline?view=table'],
  ...views.slice(2),
  ['More', '/more'],
]

test.each(onPhone)(
  'axe finds nothing, and nothing overflows, on a 360 px phone: %s',
  async (_, path) => {
    const { page, complaints } = await visit(path, { width: 360, height: 780, theme: 'dark' })
    await drawn(page, path)
    const wide = await page.evaluate('document.documentElement.scrollWidth')
    expect(wide).toBeLessThanOrEqual(360)
    expect(await violationsOf(page)).toEqual([])
    expect(complaints).toEqual([])
  },
)

test('a phone opens on Hands, with what to do and not to do in sight', async () => {
  const { page } = await visit('/', { width: 360, height: 780 }, { practice: false })
  await page.waitForSelector('.dd')
  const bottom = await page.locator('.dd').first().boundingBox()
  const nav = await page.locator('.phone-nav').boundingBox()
  expect((bottom?.y ?? 0) + (bottom?.height ?? 9999)).toBeLessThanOrEqual(nav?.y ?? 0)
  expect(await page.locator('.phone-nav [aria-current]').textContent()).toContain('Hands')
})

test('targets to press on a phone are at least 44 px high', async () => {
  const { page } = await visit('/', { width: 360, height: 780 })
  await page.waitForSelector('.needy')
  const heights = await page
    .locator('.needy, .phone-nav a, .headline')
    .evaluateAll((all) => all.map((e) => e.getBoundingClientRect().height))
  expect(Math.min(...heights)).toBeGreaterThanOrEqual(44)
})

const laneInFocus = (page: Page): Promise<string | null> =>
  page.evaluate("document.activeElement?.getAttribute('data-lane') ?? null")

test('the keyboard reaches lanes, walks them, opens one and comes back', async () => {
  const { page } = await visit('/')
  await page.waitForSelector('.stick canvas.drawn')
  for (let i = 0; i < 20 && (await laneInFocus(page)) === null; i += 1)
    await page.keyboard.press('Tab')
  const first = await laneInFocus(page)
  expect(first).not.toBeNull()
  await page.keyboard.press('ArrowRight')
  await page.waitForFunction(
    (was) => document.activeElement?.getAttribute('data-lane') !== was,
    first,
  )
  await page.keyboard.press('End')
  await page.waitForFunction(() =>
    document.activeElement?.getAttribute('data-lane')?.startsWith('FZ-1'),
  )
  await page.locator('[data-lane="CR-2-shelf-B2"]').focus()
  expect(await page.locator('.hint').textContent()).toContain('Turned')
  await page.keyboard.press('Enter')
  await page.waitForURL('**/items/CR-2-shelf-B2')
  await page.waitForSelector('h1:has-text("Turned")')
  await page.keyboard.press('Escape')
  await page.waitForURL((url) => url.pathname === '/')
  await page.goBack()
  await page.waitForURL('**/items/CR-2-shelf-B2')
})

test('a strip of calm items opens by keyboard, and folds again', async () => {
  const { page } = await visit('/')
  await page.waitForSelector('.stick canvas.drawn')
  const lanes = page.locator('a.lane')
  const before = await lanes.count()
  await page.locator('button.lane').first().focus()
  await page.keyboard.press('Enter')
  await page.waitForFunction((was) => document.querySelectorAll('a.lane').length > was, before)
  await page.waitForFunction(() => document.activeElement?.matches('a.lane'))
  await page.click('button:has-text("Fold calm items")')
  await page.waitForSelector('button:has-text("Fold calm items")', { state: 'detached' })
})

test('nothing overflows sideways at 400 % zoom, which leaves 320 px', async () => {
  const { page } = await visit('/', { width: 320, height: 640 })
  for (const path of ['/', '/waterline', '/items/CR-2-shelf-B5', '/probes', '/more']) {
    await page.goto(new URL(path, page.url()).href)
    await drawn(page, path)
    expect(await page.evaluate('document.documentElement.scrollWidth')).toBeLessThanOrEqual(320)
  }
})

/** Whether the canvas bears a frame within 2 px of the right edge of the last lane in sight; half-covered pixels are light. */
const frameStandsAtLastLane = (page: Page): Promise<boolean> =>
  page.evaluate(() => {
    const canvas = document.querySelector<HTMLCanvasElement>('.stick canvas')
    const lane = [...document.querySelectorAll('.lane')].at(-1)
    const pen = canvas?.getContext('2d')
    if (canvas == null || lane === undefined || pen == null) return false
    const box = canvas.getBoundingClientRect()
    const dense = canvas.width / box.width
    const x = (lane.getBoundingClientRect().right - box.left) * dense
    const y = (box.height / 2) * dense
    const { data } = pen.getImageData(Math.round(x - 2 * dense), y, Math.ceil(4 * dense), 1)
    for (let i = 0; i < data.length; i += 4)
      if ((data[i] ?? 255) < 190 && (data[i + 3] ?? 0) > 200) return true
    return false
  })

/** Waits until the canvas has the width of its window, and what follows from that is drawn. */
const fitsItsWindow = async (page: Page): Promise<void> => {
  await page.waitForFunction(() => {
    const canvas = document.querySelector('.stick canvas.drawn')
    const width = document.querySelector('.waterline')?.clientWidth
    return canvas !== null && Math.abs(canvas.getBoundingClientRect().width - (width ?? 0)) < 1
  })
  await page.evaluate(
    () => new Promise((done) => requestAnimationFrame(() => requestAnimationFrame(done))),
  )
}

const isStill = (page: Page): Promise<boolean> =>
  page.evaluate(async () => {
    const canvas = document.querySelector<HTMLCanvasElement>('.stick canvas')
    const frame = () => new Promise((done) => requestAnimationFrame(done))
    const before = canvas?.toDataURL()
    for (let i = 0; i < 15; i += 1) await frame()
    return before === canvas?.toDataURL()
  })

test('what is drawn stands under its links, also after the window changed', async () => {
  const { page } = await visit('/', { still: false }, { practice: false })
  for (const width of [1440, 900, 1920]) {
    await page.setViewportSize({ width, height: 900 })
    await page.waitForFunction((w) => innerWidth === w, width)
    await fitsItsWindow(page)
    // Moving takes 160 ms; it has ended when two frames look the same.
    await expect.poll(() => isStill(page)).toBe(true)
    expect(await frameStandsAtLastLane(page)).toBe(true)
  }
})

test('T swaps chart and table, and the address keeps the choice', async () => {
  const { page } = await visit('/')
  await page.waitForSelector('.stick canvas.drawn')
  await page.keyboard.press('t')
  await page.waitForSelector('.twin')
  expect(page.url()).toContain('view=table')
  await page.keyboard.press('t')
  await page.waitForSelector('.waterline')
  expect(page.url()).not.toContain('view=table')
})

test('the table has every item once, in the order of Hands and then by margin', async () => {
  const { page } = await visit('/?view=table')
  await page.waitForSelector('.twin tbody tr')
  const links = await page
    .locator('.twin tbody a')
    .evaluateAll((all) => all.map((a) => a.getAttribute('href')))
  expect(links).toHaveLength(60)
  expect(new Set(links).size).toBe(60)
  expect(links[0]).toBe('/items/CR-2-shelf-B2')
})

test('all six standings are said in words', async () => {
  const { page } = await visit('/?view=table')
  await page.waitForSelector('.twin tbody tr')
  const words = await page.locator('.twin tbody .chip').allInnerTexts()
  for (const word of ['Above', 'Near', 'Below', 'Poised', 'Turned', 'Silent'])
    expect(words).toContain(word)
})

test('what changes on the site changes on the page, without fetching all again', async () => {
  const { page, site } = await visit('/')
  await page.waitForSelector('text=03:25:04')
  const before = site.snapshots()
  site.advance(1)
  await page.waitForSelector('text=03:26:04')
  expect(site.snapshots()).toBe(before)
})

test('after a gap in the feed everything is fetched again', async () => {
  const { page, site } = await visit('/')
  await page.waitForSelector('text=03:25:04')
  const again = page.waitForResponse('**/api/v1/items')
  site.skip()
  await again
  site.advance(1)
  await page.waitForSelector('text=03:26:04')
})

test('a lost link is said at once, and nothing old looks new', async () => {
  const { page, site } = await visit('/items/CR-2-shelf-B5')
  await page.waitForSelector('.canvases[data-drawn]')
  await site.close()
  await page.waitForSelector('.stale:has-text("Data stale since 03:25:04")')
  expect(await page.locator('.lede').textContent()).toContain(
    'No chance is reckoned from old figures',
  )
})

test('figures that grow old are called stale', async () => {
  const { page } = await visit('/')
  await page.waitForSelector('.hand')
  // The site's clock now runs 300 times as fast, and no probe speaks any more.
  await page.click('.speed button:has-text("300×")')
  await page.waitForSelector('.stale:has-text("No probe has been heard")', { timeout: 30_000 })
})

test('nothing to do is said with as-of, probes heard and what cannot be assessed', async () => {
  const { page } = await visit('/', {}, { calm: true })
  const text = await page.locator('.empty').textContent()
  expect(text).toContain('No hands needed.')
  expect(text).toContain('As of 03:25:04, from 24 of 25 probes.')
  expect(text).toContain('Every stored item can be assessed.')
})

test('while nothing has come, the line stands and says what is being fetched', async () => {
  const { page, site } = await visit('/probes')
  await page.route('**/api/v1/items', () => {
    // Never answered: the page must show that it waits.
  })
  await page.goto(`${site.url}/`)
  expect(await page.locator('.loading').textContent()).toContain('Fetching')
})

test('a site that cannot be fetched is said with what to do', async () => {
  const { page, site } = await visit('/probes')
  await page.route('**/api/v1/items', (route) => route.abort())
  await page.goto(`${site.url}/`)
  const text = await page.locator('.note.red').textContent()
  expect(text).toContain('See that Hoarline is running')
})

test('an outage stands above everything', async () => {
  const { page } = await visit('/', {}, { outage: 'the disk is full; free some room' })
  expect(await page.locator('.note.red').textContent()).toContain('the disk is full')
})

test('an item that is not there is said to be so', async () => {
  const { page } = await visit('/items/nowhere')
  expect(await page.locator('h1').textContent()).toBe('No stored item nowhere')
})

test('a simulated site cannot be taken for a real one', async () => {
  const { page } = await visit('/')
  await page.waitForSelector('.practice-bar')
  expect(await page.title()).toMatch(/^PRACTICE/)
  const border = await page
    .locator('.practice-frame')
    .evaluate((e) => getComputedStyle(e).borderWidth)
  expect(border).toBe('14px')
  await page.click('.try summary')
  expect(await page.locator('.tryBox').textContent()).toContain('mosquitto_pub -h 127.0.0.1')
})

test('a real site bears no practice frame', async () => {
  const { page } = await visit('/', {}, { practice: false })
  await page.waitForSelector('.hand')
  expect(await page.locator('.practice-frame, .practice-bar').count()).toBe(0)
  expect(await page.title()).not.toContain('PRACTICE')
})

test('the clock’s speed reads as changed once the server has said so', async () => {
  const { page } = await visit('/')
  await page.click('.speed button:has-text("60×")')
  await page.waitForSelector('.speed button[aria-pressed="true"]:has-text("60×")')
})

test('light and dark follow the system until somebody chooses on this device', async () => {
  const { page } = await visit('/', { theme: 'dark' })
  await page.waitForSelector('html[data-theme="dark"]')
  await page.selectOption('.theme select', 'light')
  await page.waitForSelector('html[data-theme="light"]')
  await page.reload()
  await page.waitForSelector('html[data-theme="light"]')
})

test('the time chart zooms and steps by keyboard, and 0 follows now again', async () => {
  const { page } = await visit('/items/CR-2-shelf-B5')
  await page.waitForSelector('.canvases[data-drawn]')
  const shown = page.locator('.tools .num')
  const before = await shown.textContent()
  await page.locator('.plot').first().focus()
  await page.keyboard.press('+')
  await page.waitForFunction(
    (was) => document.querySelector('.tools .num')?.textContent !== was,
    before,
  )
  await page.keyboard.press('ArrowLeft')
  await page.keyboard.press('0')
  await page.waitForFunction(
    (was) => document.querySelector('.tools .num')?.textContent === was,
    before,
  )
})

test('the chart’s figures stand in a table one press away', async () => {
  const { page } = await visit('/items/CR-2-shelf-B5')
  await page.waitForSelector('.canvases[data-drawn]')
  await page.click('.time-figure .seg button:has-text("Table")')
  const text = await page.locator('.figures').textContent()
  expect(text).toContain('A-07, in the air')
  expect(text).toContain('product, reckoned')
})

test('the Item sheet keeps the five questions apart', async () => {
  const { page } = await visit('/items/CR-2-shelf-B5')
  for (const title of [
    'Did a reading leave its limits?',
    'Has ice formed?',
    'What this does not say',
    'If it freezes now',
  ])
    await page.waitForSelector(`h2:has-text("${title}")`)
})

test('every sign on the screen has a glyph', async () => {
  const { page } = await visit('/')
  await page.waitForSelector('.hand')
  const signs = [...new Set([...Object.values(screen).join(''), ...'Δ≥≤→←−…°µ×±·–’“”'])].filter(
    (c) => c.trim() !== '',
  )
  const missing = await page.evaluate(async (all) => {
    await document.fonts.ready
    const canvas = document.createElement('canvas')
    const pen = canvas.getContext('2d', { willReadFrequently: true })
    if (pen === null) throw new Error('no canvas')
    const font = getComputedStyle(document.body).fontFamily
    const picture = (text: string): string => {
      pen.clearRect(0, 0, 60, 60)
      pen.font = `40px ${font}`
      pen.fillText(text, 5, 45)
      return pen.getImageData(0, 0, 60, 60).data.join()
    }
    // A private sign that no font has shows what a missing glyph looks like.
    const none = new Set([picture('\u{10fffd}'), picture(' ')])
    return all.filter((sign) => none.has(picture(sign)))
  }, signs)
  expect(missing).toEqual([])
})

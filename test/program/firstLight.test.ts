import { execFileSync } from 'node:child_process'
import { connect } from 'node:net'
import { describe, expect, onTestFinished, test } from 'vitest'
import type { RefusedView } from '../../config/schema/api.js'
import { launchBrowser } from '../browser/chromium.js'
import { program, testNeeding } from '../needs.js'
import {
  device,
  listen,
  type Running,
  refused,
  senml,
  siteFileIn,
  smallSite,
  start,
  temporaryFolder,
} from './hoarline.js'

const minute_ms = 60_000
/** Whole minutes before now: a device's clock that agrees with the wall's. */
const ago_ms = (minutes: number) =>
  Math.floor(Date.now() / minute_ms) * minute_ms - minutes * minute_ms

const startSmall = async (
  more: readonly string[] = [],
): Promise<{ running: Running; folder: string; args: string[] }> => {
  const folder = temporaryFolder()
  const site = siteFileIn(folder, smallSite(new Date(ago_ms(120)).toISOString()))
  const args = ['--site', site, '--data', `${folder}/data`, '--mqtt-port', '0', ...more]
  return { running: await start(args), folder, args }
}

const minutes = 90
/** Readings of air and product in the cool-down. */
const published = 2 * (minutes + 1)

/** A cool-down of V1 that ends in ice: air and product, a minute apart, ending now. */
const coolDownAndTurn = async (running: Running) => {
  const client = await device(running.mqtt ?? '')
  for (let k = 0; k <= minutes; k++) {
    const t_ms = ago_ms(minutes - k)
    const product_C = k < 80 ? -8 + 13 * Math.exp(-k / 35) : -0.6
    await client.publishAsync('lowmoor/cr1/air', JSON.stringify({ ts: t_ms, t: [{ c: -8.1 }] }), {
      qos: 1,
    })
    await client.publishAsync(
      'lowmoor/cr1/p1',
      senml('urn:dev:ow:lowmoor-p1', Math.round(product_C * 20) / 20, t_ms / 1000),
      { qos: 1 },
    )
  }
  return client
}

describe('the program on a real site', () => {
  test('a reading published by a real MQTT client moves its item on the page', async () => {
    const { running } = await startSmall()
    const client = await device(running.mqtt ?? '')
    const browser = await launchBrowser()
    onTestFinished(() => browser.close())
    const page = await browser.newPage({ viewport: { width: 1280, height: 800 } })
    await page.goto(`${running.http}/items/V2`)
    await page.getByRole('heading', { name: /Silent/ }).waitFor()
    expect(await page.title()).not.toMatch(/^PRACTICE/)

    await client.publishAsync('lowmoor/cr2/p2', '4.2', { qos: 1 })
    await page.getByRole('heading', { name: /Above/ }).waitFor()
    await page.getByText('4.2 °C').first().waitFor()
  })

  testNeeding(
    program('mosquitto_pub') === null ? 'mosquitto_pub' : null,
    'mosquitto_pub moves an item',
    async () => {
      const { running } = await startSmall()
      const live = await listen(running)
      const moved = live.untilItem('V1', (i) => i.verdict.evidence === 'measured in item')
      const { hostname, port } = new URL(running.mqtt ?? '')
      execFileSync('mosquitto_pub', [
        '-h',
        hostname,
        '-p',
        port,
        '-q',
        '1',
        '-t',
        'lowmoor/cr1/p1',
        '-m',
        senml('urn:dev:ow:lowmoor-p1', 4.6),
      ])
      expect((await moved).verdict.temperature_C).toBeCloseTo(4.6, 0)
    },
  )

  test('a rise to its own freezing point in colder air is Turned, and stays so over kill -9', async () => {
    const { running, args } = await startSmall()
    const live = await listen(running)
    const turned = live.untilItem(
      'V1',
      (i) => i.verdict.standing === 'Turned' && i.verdict.evidence === 'measured in item',
    )
    await coolDownAndTurn(running)
    const item = await turned
    expect(item.verdict).toMatchObject({
      hasBeenFrozen: true,
      evidence: 'measured in item',
      asIntended: false,
    })
    expect(item.verdict.turned.probability).toBeGreaterThan(0.95)
    expect(item.announcedTurned_ms).not.toBeNull()

    await running.kill()
    const again = await start(args)
    const after = (await again.snapshot()).items.find((i) => i.id === 'V1')
    expect(after?.verdict).toMatchObject({ standing: 'Turned', hasBeenFrozen: true })
    expect(after?.announcedTurned_ms).toBe(item.announcedTurned_ms)
    const trail = await again.get<{ standing: string }[]>('/items/V1/verdicts')
    expect(trail[0]?.standing).toBe('Turned')
    expect(await again.stop()).toBe(0)
  })

  test('a restart makes the same verdicts of the same readings', async () => {
    const { running, args } = await startSmall()
    const live = await listen(running)
    const all = live.until((b) => b.intake.readings === published)
    await coolDownAndTurn(running)
    await all
    // The count runs ahead of the verdicts by at most a tick: two pushes later all are judged.
    for (let push = 0; push < 2; push++) await live.untilItem('V1', () => true)
    const strip = (s: Awaited<ReturnType<Running['snapshot']>>) =>
      s.items.map(({ verdict: v }) => [
        v.item,
        v.standing,
        v.phase,
        v.hasBeenFrozen,
        v.evidence,
        // The weights of its candidates are carried to the clock at which one looks.
        Math.round((v.turned.from_C ?? 0) * 100),
        v.turned.earliest,
      ])
    const before = strip(await running.snapshot())
    await running.kill()
    const again = await start(args)
    expect(strip(await again.snapshot())).toEqual(before)
  })

  test.each([
    {
      name: 'a malformed payload',
      topic: 'lowmoor/cr1/p1',
      payload: '[{"n":',
      code: /./,
      remedy: /./,
    },
    {
      name: 'an unknown topic',
      topic: 'lowmoor/cr9/p9',
      payload: '4.1',
      code: /unknown-topic/,
      remedy: /site file/,
    },
    {
      name: 'a number that is none',
      topic: 'lowmoor/cr2/p2',
      payload: '4,1',
      code: /./,
      remedy: /./,
    },
    {
      name: 'microseconds sent as milliseconds',
      topic: 'lowmoor/cr1/air',
      payload: `{"ts":${Date.now() * 1000},"t":[{"c":4}]}`,
      code: /./,
      remedy: /µs|micro|ms/,
    },
  ])(
    '$name is refused with its remedy, kept, counted and shown; the program goes on',
    async ({ topic, payload, code, remedy }) => {
      const { running } = await startSmall()
      const live = await listen(running)
      const counted = live.until((b) => b.intake.refused + b.intake.bad > 0)
      const client = await device(running.mqtt ?? '')
      await client.publishAsync(topic, payload, { qos: 1 })
      await counted
      const [row] = await running.get<RefusedView[]>('/probes/refused')
      expect(row).toMatchObject({ topic, payload })
      expect(row?.code).toMatch(code)
      expect(row?.remedy).toMatch(remedy)

      const heard = live.untilItem('V2', (i) => i.verdict.evidence === 'measured in item')
      await client.publishAsync('lowmoor/cr2/p2', '4.2', { qos: 1 })
      await heard
    },
  )

  test('a fault code is kept and never becomes a temperature', async () => {
    const { running } = await startSmall()
    const live = await listen(running)
    const client = await device(running.mqtt ?? '')
    const bad = live.until((b) => b.probes.some((p) => p.id === 'P1' && p.quality === 'bad'))
    await client.publishAsync('lowmoor/cr1/p1', senml('urn:dev:ow:lowmoor-p1', 85), { qos: 1 })
    await bad
    const item = (await running.snapshot()).items.find((i) => i.id === 'V1')
    expect(item?.verdict.standing).toBe('Silent')
  })

  test('a broker that goes away is named on every page, and nothing crashes', async () => {
    const { running } = await startSmall(['--mqtt', 'plant=mqtt://127.0.0.1:9'])
    const live = await listen(running)
    const { intake } = await live.until((b) => b.intake.outage !== null)
    expect(intake.outage).toMatch(/plant|127\.0\.0\.1/)
    const health = await fetch(`${running.http}/api/v1/health`)
    expect(health.status).toBe(503)
    expect(await health.json()).toMatchObject({ live: true, ready: false })
  })
})

describe('what the program refuses at its start', () => {
  test('a site file with a wrong field, naming it, its value and the remedy', async () => {
    const folder = temporaryFolder()
    const site = smallSite('2026-01-05T00:00:00Z')
    Object.assign(site.probes[0] ?? {}, { T90_s: 0, placment: 'x' })
    const { code, stderr } = await refused([
      '--site',
      siteFileIn(folder, site),
      '--data',
      `${folder}/data`,
      '--mqtt-port',
      '0',
    ])
    expect(code).toBe(2)
    expect(stderr).toMatch(
      /probes\[0\]\.T90_s is 0: a lag is never 0; give the time to 90 % of a step/,
    )
    expect(stderr).toMatch(/placment.*did you mean "placement"/)
  })

  test('a port in use, by name', async () => {
    const { running, folder } = await startSmall()
    const taken = new URL(running.http).port
    const { code, stderr } = await refused([
      '--port',
      taken,
      '--site',
      `${folder}/site.json`,
      '--data',
      `${folder}/other`,
      '--mqtt-port',
      '0',
    ])
    expect(code).toBe(2)
    expect(stderr).toMatch(new RegExp(`HOARLINE_PORT is ${taken}: another program listens`))
  })

  test('a folder that another Hoarline holds, and one that holds practice data', async () => {
    const { folder } = await startSmall()
    const held = await refused([
      '--site',
      `${folder}/site.json`,
      '--data',
      `${folder}/data`,
      '--mqtt-port',
      '0',
    ])
    expect(held).toMatchObject({ code: 2 })
    expect(held.stderr).toMatch(/another Hoarline is running on this folder/)

    const demo = await start(['--data', `${folder}/practice`, '--mqtt-port', '0'])
    await demo.stop()
    const mixed = await refused([
      '--site',
      `${folder}/site.json`,
      '--data',
      `${folder}/practice`,
      '--mqtt-port',
      '0',
    ])
    expect(mixed).toMatchObject({ code: 2 })
    expect(mixed.stderr).toMatch(/practice data are never stored among real ones/)
  })
})

describe('who may reach it', () => {
  test('a page of another name cannot read or change it', async () => {
    const { running } = await startSmall()
    const foreign = await fetch(`${running.http}/api/v1/practice/speed`, {
      method: 'PUT',
      headers: { 'Content-Type': 'application/json', Origin: 'http://example.org' },
      body: '{"speed":1}',
    })
    expect(foreign.status).toBe(403)
    const own = await fetch(`${running.http}/api/v1/practice/speed`, {
      method: 'PUT',
      headers: { 'Content-Type': 'application/json' },
      body: '{"speed":1}',
    })
    expect(own.status).toBe(409)
    expect(own.headers.get('content-type')).toMatch(/problem\+json/)
    expect(await own.json()).toMatchObject({ field: 'speed', remedy: 'leave it' })
  })

  test('the pages come with a policy that lets no foreign script in', async () => {
    const { running } = await startSmall()
    const page = await fetch(running.http)
    expect(page.headers.get('content-security-policy')).toMatch(/script-src 'self'/)
    expect(page.headers.get('content-security-policy')).not.toMatch(/unsafe/)
    expect((await fetch(`${running.http}/api/v1/nothing`)).status).toBe(404)
  })
})

test('SIGTERM ends it at once, though a browser holds a spare connection that asks nothing', async () => {
  const { running } = await startSmall()
  const { hostname, port } = new URL(running.http)
  const spare = connect(Number(port), hostname)
  spare.on('error', () => {}) // it is cut off, and that is the point
  await new Promise<void>((resolve) => spare.once('connect', () => resolve()))
  onTestFinished(() => void spare.destroy())
  // Its own patience would end it with 1.
  expect(await running.stop()).toBe(0)
})

import { execFileSync, spawn, spawnSync } from 'node:child_process'
import { mkdtempSync, readFileSync, rmSync } from 'node:fs'
import { createServer } from 'node:net'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { Aedes } from 'aedes'
import { expect, onTestFinished, test } from 'vitest'
import { readLibrary } from '../../config/library/read.js'
import { parse } from '../../config/schema/parse.js'
import { ReadingLine } from '../../config/schema/reading.js'
import { readSite } from '../../config/schema/readSite.js'
import { playLive } from '../../sim/live.js'
import { advance, freshState } from '../../sim/model.js'
import { scenarioOf, siteOf } from '../../sim/scenarios.js'
import { worldOf } from '../../sim/world.js'

const play = fileURLToPath(new URL('../../dist/sim/play.js', import.meta.url))

test('files: a site that is read, readings in order of receipt, and the truth', () => {
  const folder = mkdtempSync(join(tmpdir(), 'hoarline-sim-'))
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }))
  const file = (name: string) => join(folder, name)
  const run = (name: string) =>
    execFileSync(
      process.execPath,
      [
        play,
        '--scenario',
        'buffer-lags',
        '--seed',
        '9',
        '--site',
        file('site.json'),
        '--readings',
        file(name),
        '--truth',
        file('truth.jsonl'),
      ],
      { stdio: 'pipe' },
    )
  run('a.jsonl')
  run('b.jsonl')
  expect(readFileSync(file('a.jsonl'), 'utf8')).toBe(readFileSync(file('b.jsonl'), 'utf8'))

  readSite(JSON.parse(readFileSync(file('site.json'), 'utf8')))
  const readings = readFileSync(file('a.jsonl'), 'utf8')
    .trim()
    .split('\n')
    .map((l) => parse(ReadingLine, JSON.parse(l)))
  const received = readings.map((r) => Date.parse(r.receivedAt ?? ''))
  expect(received.every((t, i) => i === 0 || t >= (received[i - 1] ?? 0))).toBe(true)
  const truth = readFileSync(file('truth.jsonl'), 'utf8')
    .trim()
    .split('\n')
    .map((l) => JSON.parse(l) as Record<string, unknown>)
  expect(truth.at(-1)).toMatchObject({ t: '2026-03-02T04:00:00Z', turned: expect.any(Boolean) })
})

test.each([
  { args: ['--scenario', 'rewarmd'], says: /did you mean "rewarmed"/ },
  { args: ['--scenario', 'demo'], says: /nothing to write to/ },
  { args: [], says: /--scenario .*missing/ },
  { args: ['--scenario', 'demo', '--seed', 'x', '--site', '/dev/null'], says: /--seed is x/ },
  { args: ['--sead', '3'], says: /--help/ },
  { args: ['--scenario', 'demo', '--seed', '1.5', '--site', '/dev/null'], says: /no whole number/ },
  { args: ['--scenario', 'demo', '--mqtt', 'nowhere'], says: /--mqtt is nowhere.*mqtt:\/\// },
  {
    args: ['--scenario', 'demo', '--truth', join('no-such-folder', 'truth.jsonl')],
    says: /--truth is no-such-folder.*folder that exists/,
  },
])('$args ends with 2 and says what to change', ({ args, says }) => {
  const { status, stderr } = spawnSync(process.execPath, [play, ...args], { encoding: 'utf8' })
  expect(status).toBe(2)
  expect(stderr).toMatch(says)
})

test('MQTT: every reading up to the clock reaches a real broker, and none beyond', async () => {
  const scenario = scenarioOf('rewarmed')
  const world = worldOf(scenario, siteOf(scenario), readLibrary().solutes, 4)
  const expected = advance(world, freshState(world, 4), 900, 4).sent.length
  const broker = await Aedes.createBroker()
  const server = createServer(broker.handle)
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  const address = server.address()
  const port = typeof address === 'object' && address !== null ? address.port : 0
  const heard: string[] = []
  const all = new Promise<void>((resolve) => {
    broker.on('publish', (packet, client) => {
      if (client === null) return
      heard.push(String(packet.payload))
      if (heard.length === expected) resolve()
    })
  })
  const live = playLive({
    world,
    seed: 4,
    url: `mqtt://127.0.0.1:${port}`,
    saved: null,
    now_ms: () => world.start_ms + 900_000,
    keep: () => {},
    onFault: (error) => {
      throw error
    },
  })
  await all
  await live.stop()
  expect(heard).toHaveLength(expected)
  await new Promise<void>((resolve) => broker.close(() => resolve()))
  server.close()
})

test('MQTT to the end of a scenario: the last readings too reach a slow broker, and the truth is written', async () => {
  const folder = mkdtempSync(join(tmpdir(), 'hoarline-sim-'))
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }))
  const truth = join(folder, 'truth.jsonl')
  const scenario = scenarioOf('buffer-lags')
  const world = worldOf(scenario, siteOf(scenario), readLibrary().solutes, 9)
  const expected = advance(world, freshState(world, 9), scenario.hours * 3600, 9).sent.length

  let heard = 0
  const broker = await Aedes.createBroker({
    // Slow enough that much is still under way when the scenario ends.
    authorizePublish: (_client, _packet, done) => void setTimeout(() => done(null), 20),
  })
  broker.on('publish', (_packet, client) => {
    if (client !== null) heard += 1
  })
  const server = createServer(broker.handle)
  await new Promise<void>((resolve) => server.listen(0, '127.0.0.1', resolve))
  onTestFinished(async () => {
    await new Promise<void>((resolve) => broker.close(() => resolve()))
    server.close()
  })
  const address = server.address()
  const port = typeof address === 'object' && address !== null ? address.port : 0
  const args = ['--scenario', 'buffer-lags', '--seed', '9', '--speed', '100000']
  const child = spawn(process.execPath, [
    ...[play, ...args, '--truth', truth],
    ...['--mqtt', `mqtt://127.0.0.1:${port}`],
  ])
  onTestFinished(() => void child.kill('SIGKILL'))
  const code = await new Promise((resolve) => child.once('exit', resolve))
  expect(code).toBe(0)
  expect(heard).toBe(expected)
  const last = readFileSync(truth, 'utf8').trim().split('\n').at(-1) ?? ''
  expect(JSON.parse(last)).toMatchObject({ item: world.items.at(-1)?.id, turned: false })
})

import { spawn } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { createInterface } from 'node:readline'
import { fileURLToPath } from 'node:url'
import { Worker } from 'node:worker_threads'
import type { Snapshot } from '../../config/schema/api.js'
import { siteOfSize } from './site.js'

const items = 400
const minutes = 60
const connections = 4
export const messages = items * minutes

const beside = (name: string) => fileURLToPath(new URL(name, import.meta.url))

type Server = { mqtt: number; http: string | null; end(): Promise<void> }

const started = (
  args: string[],
  ready: (line: string) => Server['mqtt'] | null,
  http: (line: string) => string | null,
): Promise<Server> =>
  new Promise((resolve, reject) => {
    const child = spawn(process.execPath, args, { stdio: ['ignore', 'pipe', 'inherit'] })
    process.once('exit', () => child.kill('SIGKILL'))
    child.once('exit', (code) => reject(new Error(`ended with ${code}`)))
    createInterface({ input: child.stdout }).on('line', (line) => {
      const mqtt = ready(line)
      if (mqtt === null) return
      resolve({
        mqtt,
        http: http(line),
        end: () =>
          new Promise((done) => {
            child.once('exit', () => done())
            child.kill('SIGTERM')
          }),
      })
    })
  })

/** Publishes everything; when the first left, and how long it took until the last PUBACK. */
const publishAll = async (port: number): Promise<{ from_ms: number; acked_s: number }> => {
  const all = Array.from({ length: items }, (_, i) => i)
  const workers = Array.from(
    { length: connections },
    (_, c) =>
      new Worker(beside('publisher.js'), {
        workerData: {
          port,
          items: all.filter((i) => i % connections === c),
          minutes,
          name: `bench-${c}`,
        },
      }),
  )
  const heard = (word: string) =>
    Promise.all(
      workers.map(
        (w) =>
          new Promise<void>((resolve) => {
            w.on('message', (m) => {
              if (m === word) resolve()
            })
          }),
      ),
    )
  const done = heard('done')
  await heard('ready')
  const from_ms = performance.now()
  for (const w of workers) w.postMessage('go')
  await done
  const acked_s = (performance.now() - from_ms) / 1000
  await Promise.all(workers.map((w) => w.terminate()))
  return { from_ms, acked_s }
}

const inFolder = async <T>(work: (folder: string) => Promise<T>): Promise<T> => {
  const folder = mkdtempSync(join(tmpdir(), 'hoarline-bench-'))
  try {
    return await work(folder)
  } finally {
    rmSync(folder, { recursive: true, force: true })
  }
}

/** The plain pipe: messages/s published, durable and acknowledged. */
export const pipeRate = (): Promise<number> =>
  inFolder(async (folder) => {
    const server = await started(
      [beside('pipe.js'), folder],
      (line) => (JSON.parse(line) as { mqtt: number }).mqtt,
      () => null,
    )
    const { acked_s } = await publishAll(server.mqtt)
    await server.end()
    return messages / acked_s
  })

/** The whole program: messages/s acknowledged, and messages/s judged and ready to be pushed. */
export const programRate = (): Promise<{ acked: number; judged: number }> =>
  inFolder(async (folder) => {
    const site = join(folder, 'site.json')
    writeFileSync(
      site,
      JSON.stringify(siteOfSize(items, new Date(Date.now() - 3_600_000).toISOString())),
    )
    const server = await started(
      [
        beside('../../server/main.js'),
        '--site',
        site,
        '--data',
        join(folder, 'data'),
        '--port',
        '0',
        '--mqtt-port',
        '0',
        '--log',
        'error',
      ],
      (line) => Number(/mqtt:\/\/[^:]+:(\d+)/.exec(line)?.[1] ?? Number.NaN) || null,
      (line) => /http:\S+/.exec(line)?.[0] ?? null,
    )
    const { from_ms, acked_s } = await publishAll(server.mqtt)
    const get = async (path: string) => (await fetch(`${server.http}/api/v1/${path}`)).json()
    while (((await get('health')) as { behind_s: number }).behind_s > 0)
      await new Promise((resolve) => setTimeout(resolve, 50))
    const judged_s = (performance.now() - from_ms) / 1000
    const snapshot = (await get('items')) as Snapshot
    const { readings, duplicates } = snapshot.intake
    // The same value of one probe within one millisecond of receipt counts as the same reading.
    if (readings + duplicates !== messages) throw new Error(`${readings} of ${messages} arrived`)
    await server.end()
    return { acked: messages / acked_s, judged: messages / judged_s }
  })

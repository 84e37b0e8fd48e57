import type { MqttClient } from 'mqtt'
import { connectAsync } from 'mqtt'
import { openForReading } from '../../server/store/database.js'
import { type Program, startOtherBroker, startProgram } from '../ingest/processes.js'

/** Readings under way at once: enough that a kill always meets some in every stage. */
const window = 200
/** Messages that may wait in the other broker: it keeps them in a list that it searches. */
const mostWaiting = 2000
const probes = [{ id: 'J', source: { topic: 'j', payload: 'json', timeFormat: 'ms', seq: '/n' } }]

/** mulberry32 (Ettinger, public domain) [from memory]: the same kills for the same seed. */
const seeded = (seed: number) => () => {
  seed = (seed + 0x6d2b79f5) | 0
  let x = Math.imul(seed ^ (seed >>> 15), 1 | seed)
  x = (x + Math.imul(x ^ (x >>> 7), 61 | x)) ^ x
  return ((x ^ (x >>> 14)) >>> 0) / 4_294_967_296
}

/**
 * A gateway with a store of its own, as real ones have: a message is sent again until it is
 * acknowledged, with the same time and sequence number.
 */
const gateway = () => {
  const t_ms = Date.UTC(2026, 0, 5)
  const open = new Set<number>()
  const acked = new Set<number>()
  let next = 0
  let stopped = false
  const payload = (n: number) => JSON.stringify({ value: (n % 1000) / 10, time: t_ms + n, n })

  return {
    acked,
    /** Publishes until the connection breaks or `enough` are acknowledged; returns when none is under way. */
    async run(
      client: MqttClient,
      enough: number,
      onAck: () => void,
      room: () => Promise<void> = async () => {},
    ): Promise<void> {
      stopped = false
      const again = [...open]
      const one = async (): Promise<void> => {
        while (!stopped && acked.size < enough) {
          await room()
          const n = again.shift() ?? next++
          open.add(n)
          try {
            await client.publishAsync('j', payload(n), { qos: 1 })
          } catch {
            return // the connection is gone, and nobody knows whether it was kept
          }
          open.delete(n)
          acked.add(n)
          onAck()
        }
      }
      await Promise.all(Array.from({ length: window }, one))
    },
    stop(): void {
      stopped = true
    },
  }
}

const connected = async (port: number): Promise<MqttClient> => {
  const client = await connectAsync({
    host: '127.0.0.1',
    port,
    protocol: 'mqtt',
    reconnectPeriod: 0,
    clean: true,
  })
  client.on('error', () => {})
  return client
}

export type Found = {
  readonly kills: number
  readonly acked: number
  readonly stored: number
  readonly lost: number
  readonly doubled: number
  readonly wrong: number
  readonly counted: boolean
  readonly integrity: string
  readonly slowestStart_ms: number
}

/** What is in the store after it all, against what was acknowledged. */
const found = (data: string, acked: ReadonlySet<number>) => {
  const db = openForReading(data)
  const rows = db.prepare<[], [number, number]>('SELECT seq, celsius FROM reading').raw().all()
  const further = db.prepare('SELECT count(*) FROM further_reading').pluck().get() as number
  const counted = db
    .prepare("SELECT n FROM counter WHERE name = 'readings'")
    .pluck()
    .get() as number
  const integrity = db.pragma('integrity_check', { simple: true }) as string
  db.close()
  const stored = new Set(rows.map(([seq]) => seq))
  return {
    acked: acked.size,
    stored: rows.length,
    lost: [...acked].filter((n) => !stored.has(n)).length,
    doubled: rows.length - stored.size + further,
    wrong: rows.filter(([seq, celsius]) => celsius !== (seq % 1000) / 10).length,
    counted: counted === rows.length,
    integrity,
  }
}

/**
 * Kills the intake with its embedded broker again and again while a gateway publishes.
 *
 * @param ackFirst  the mistake that this is there to find
 */
export const killEmbedded = async (
  data: string,
  kills: number,
  seed: number,
  ackFirst = false,
): Promise<Found> => {
  const random = seeded(seed)
  const { acked, run, stop } = gateway()
  let slowestStart_ms = 0
  const start = async (): Promise<Program> => {
    const from = performance.now()
    const program = await startProgram({ data, probes, ackFirst })
    slowestStart_ms = Math.max(slowestStart_ms, performance.now() - from)
    return program
  }

  for (let i = 0; i < kills; i++) {
    const program = await start()
    const client = await connected(program.port ?? 0)
    // A number of acks from now, not a time: so slow machines are killed in the same places.
    let left = 1 + Math.floor(random() * 3000)
    let killed: Promise<void> | null = null
    client.once('close', () => client.end(true))
    await run(client, Number.POSITIVE_INFINITY, () => {
      left -= 1
      if (left === 0) killed = program.kill().finally(stop)
    })
    await killed
  }
  const last = await start()
  const client = await connected(last.port ?? 0)
  await run(client, acked.size + window, () => {})
  await client.endAsync()
  if ((await last.stop()) !== 0) throw new Error('the program did not end by itself')
  return { kills, ...found(data, acked), slowestStart_ms }
}

/**
 * Kills the intake while it listens to somebody else's broker. That broker lives on and has taken
 * all that the gateway sent, so all of it must end in the log.
 */
export const killListener = async (data: string, kills: number, seed: number): Promise<Found> => {
  const random = seeded(seed)
  const broker = await startOtherBroker(0)
  const { acked, run, stop } = gateway()
  let slowestStart_ms = 0
  let acksOfOurs = 0
  let onAck = () => {}
  const wanting: (() => void)[] = []
  broker.onAck(() => {
    acksOfOurs += 1
    onAck()
    for (const go of wanting.splice(0)) go()
  })
  const room = async () => {
    while (acked.size - acksOfOurs > mostWaiting)
      await new Promise<void>((resolve) => void wanting.push(resolve))
  }
  try {
    // Once, so that the broker knows the subscription before anything is published.
    const start = async () => {
      const from = performance.now()
      const program = await startProgram({ data, probes, outsidePort: broker.port })
      slowestStart_ms = Math.max(slowestStart_ms, performance.now() - from)
      return program
    }
    let program = await start()
    await program.connected()
    const client = await connected(broker.port)
    const sending = run(client, Number.POSITIVE_INFINITY, () => {}, room)
    for (let i = 0; i < kills; i++) {
      const until = acksOfOurs + 1 + Math.floor(random() * 1500)
      await new Promise<void>((resolve) => {
        onAck = () => {
          if (acksOfOurs >= until) resolve()
        }
      })
      await program.kill()
      program = await start()
    }
    onAck = () => {}
    stop()
    await sending
    await client.endAsync()
    const reader = openForReading(data)
    const count = reader.prepare('SELECT count(*) FROM reading').pluck()
    while ((count.get() as number) < acked.size) {
      await new Promise<void>((resolve) => {
        onAck = resolve
        if ((count.get() as number) >= acked.size) resolve()
      })
    }
    reader.close()
    if ((await program.stop()) !== 0) throw new Error('the program did not end by itself')
    return { kills, ...found(data, acked), slowestStart_ms }
  } finally {
    await broker.kill()
  }
}

export const flawless = {
  lost: 0,
  doubled: 0,
  wrong: 0,
  counted: true,
  integrity: 'ok',
} as const

import { mkdtempSync, rmSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { connectAsync, type IClientOptions, type MqttClient } from 'mqtt'
import { onTestFinished } from 'vitest'
import type { Reading } from '../../config/schema/reading.js'
import type { ProbeId } from '../../config/schema/site.js'
import { decode } from '../../server/decode/decode.js'
import { mappingsOf } from '../../server/decode/mappings.js'
import { openLog, type SqliteLog } from '../../server/log/sqliteLog.js'
import type { Fault } from '../../server/log/wire.js'
import { openBroker } from '../../server/mqtt/broker.js'
import type { Receive } from '../../server/mqtt/message.js'
import type { Outage } from '../../server/seam.js'
import { siteOf } from '../decode/site.js'

/** A folder that is gone after the test. */
export const temporaryFolder = (): string => {
  const folder = mkdtempSync(join(tmpdir(), 'hoarline-'))
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }))
  return folder
}

/** A reading with defaults; its key is what a test is about. */
export const reading = (
  probe: string,
  t_ms: number,
  celsius: number | null,
  rest: Partial<Reading> = {},
): Reading => ({
  probe: probe as ProbeId,
  t_ms,
  receivedAt_ms: t_ms + 1000,
  celsius,
  seq: -1,
  quality: 'good',
  timeSource: 'device',
  ...rest,
})

/** A fault that is off; see `failOnce`, `failAll`. */
export const noFault = (): Fault => new Int32Array(new SharedArrayBuffer(8))
export const failOnce = (fault: Fault, afterWrites: number): void => {
  fault[1] = afterWrites + 1
  Atomics.store(fault, 0, 1)
}
export const failAll = (fault: Fault): void => void Atomics.store(fault, 0, 2)
export const heal = (fault: Fault): void => void Atomics.store(fault, 0, 0)

/** A log that is closed after the test, and a promise for its next change between well and away. */
export const testLog = async (
  options: { data?: string; fault?: Fault; patience_ms?: number } = {},
) => {
  const waiting: ((outage: Outage | null) => void)[] = []
  const log = await openLog({
    data: options.data ?? temporaryFolder(),
    onOutage: (outage) => {
      for (const resolve of waiting.splice(0)) resolve(outage)
    },
    ...(options.fault === undefined ? {} : { fault: options.fault }),
    waits: {
      retry_ms: 10,
      ...(options.patience_ms === undefined ? {} : { patience_ms: options.patience_ms }),
    },
  })
  onTestFinished(() => log.close())
  return {
    log,
    nextOutage: () => new Promise<Outage | null>((resolve) => waiting.push(resolve)),
  }
}

export const keepAll = (log: SqliteLog, readings: readonly Reading[]) =>
  log.append(
    readings.map((r) => ({ part: 0, reading: r })),
    [],
  )

/** Decode and log behind one function, as the program wires them. */
export const receiver = (log: SqliteLog, probes: readonly object[]): Receive => {
  const mappings = mappingsOf(siteOf(probes))
  return async (message) => {
    const { readings, refused } = decode({ ...message, receivedAt_ms: Date.now() }, mappings)
    await log.append(
      readings.map((r) => ({ part: 0, reading: r })),
      refused,
    )
  }
}

/** The embedded broker with a log behind it, closed after the test. */
export const testIntake = async (
  probes: readonly object[],
  options: Parameters<typeof testLog>[0] = {},
) => {
  const { log, nextOutage } = await testLog(options)
  const faults: unknown[] = []
  const broker = await openBroker({
    host: '127.0.0.1',
    port: 0,
    receive: receiver(log, probes),
    onFault: (error) => void faults.push(error),
  })
  onTestFinished(() => broker.close())
  return { log, broker, nextOutage, faults }
}

/** A device as others build them: mqtt.js. Ended after the test. */
export const device = async (port: number, options: IClientOptions = {}): Promise<MqttClient> => {
  const client = await connectAsync({
    host: '127.0.0.1',
    port,
    protocol: 'mqtt',
    reconnectPeriod: 20,
    ...options,
  })
  client.on('error', () => {}) // a connection that is cut is what some tests are about
  onTestFinished(() => client.endAsync(true))
  return client
}

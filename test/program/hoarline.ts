import { type ChildProcess, spawn } from 'node:child_process'
import { mkdtempSync, rmSync, writeFileSync } from 'node:fs'
import { tmpdir } from 'node:os'
import { join } from 'node:path'
import { createInterface } from 'node:readline'
import { fileURLToPath } from 'node:url'
import mqtt, { type MqttClient } from 'mqtt'
import { io, type Socket } from 'socket.io-client'
import { onTestFinished } from 'vitest'
import type { Changed, ItemView, Snapshot } from '../../config/schema/api.js'

const main = fileURLToPath(new URL('../../dist/server/main.js', import.meta.url))

export type Running = {
  readonly http: string
  readonly mqtt: string | null
  readonly stderr: () => string
  snapshot(): Promise<Snapshot>
  get<T>(path: string): Promise<T>
  kill(): Promise<void>
  /** SIGTERM; resolves with the exit code. */
  stop(): Promise<number | null>
}

/** A folder that goes when the test has ended. */
export const temporaryFolder = (): string => {
  const folder = mkdtempSync(join(tmpdir(), 'hoarline-test-'))
  onTestFinished(() => rmSync(folder, { recursive: true, force: true }))
  return folder
}

export const siteFileIn = (folder: string, site: unknown): string => {
  const file = join(folder, 'site.json')
  writeFileSync(file, JSON.stringify(site))
  return file
}

const ended = (child: ChildProcess): Promise<number | null> =>
  child.exitCode !== null || child.signalCode !== null
    ? Promise.resolve(child.exitCode)
    : new Promise((resolve) => child.once('exit', (code) => resolve(code)))

/** The built program in a process of its own, as its user starts it; resolves at its ready line. */
export const start = (
  args: readonly string[],
  environment: Record<string, string> = {},
): Promise<Running> =>
  new Promise((resolve, reject) => {
    const child = spawn(
      process.execPath,
      ['--enable-source-maps', main, '--port', '0', '--log', 'warn', ...args],
      {
        env: { ...process.env, ...environment },
        stdio: ['ignore', 'pipe', 'pipe'],
      },
    )
    let stderr = ''
    child.stderr.on('data', (bytes) => {
      stderr += bytes
    })
    onTestFinished(() => void child.kill('SIGKILL'))
    child.once('exit', (code) => reject(new Error(`the program ended with ${code}: ${stderr}`)))
    createInterface({ input: child.stdout }).on('line', (line) => {
      const ready = /^Hoarline is ready: (http:\S+)(?: {2}(mqtt:\S+))?$/.exec(line)
      if (ready?.[1] === undefined) return
      const http = ready[1]
      const get = async <T>(path: string): Promise<T> =>
        (await (await fetch(`${http}/api/v1${path}`)).json()) as T
      resolve({
        http,
        mqtt: ready[2] ?? null,
        stderr: () => stderr,
        get,
        snapshot: () => get<Snapshot>('/items'),
        async kill() {
          child.kill('SIGKILL')
          await ended(child)
        },
        stop() {
          child.kill('SIGTERM')
          return ended(child)
        },
      })
    })
  })

/** The built program where it is expected to refuse: its exit code and what it said. */
export const refused = (
  args: readonly string[],
): Promise<{ code: number | null; stderr: string }> =>
  new Promise((resolve) => {
    const child = spawn(process.execPath, [main, '--port', '0', ...args], {
      stdio: ['ignore', 'ignore', 'pipe'],
    })
    let stderr = ''
    child.stderr.on('data', (bytes) => {
      stderr += bytes
    })
    child.once('exit', (code) => resolve({ code, stderr }))
  })

/** A real MQTT client, as any device is. */
export const device = async (url: string): Promise<MqttClient> => {
  const client = await mqtt.connectAsync(url, { reconnectPeriod: 0 })
  onTestFinished(() => void client.end(true))
  return client
}

/** The live feed as a page hears it, waiting for what it is told to. */
export const listen = async (program: Running) => {
  const socket: Socket = io(program.http, { path: '/live', transports: ['websocket'] })
  onTestFinished(() => void socket.close())
  await new Promise<void>((resolve, reject) => {
    socket.once('connect', () => resolve())
    socket.once('connect_error', reject)
  })
  return {
    /** The first batch that satisfies a condition, from now on. */
    until: (holds: (batch: Changed) => boolean): Promise<Changed> =>
      new Promise((resolve) => {
        const on = (batch: Changed) => {
          if (!holds(batch)) return
          socket.off('changed', on)
          resolve(batch)
        }
        socket.on('changed', on)
      }),
    /** The item as soon as a pushed verdict of it satisfies a condition. */
    untilItem(id: string, holds: (item: ItemView) => boolean): Promise<ItemView> {
      return this.until((batch) => batch.items.some((i) => i.id === id && holds(i))).then(
        (batch) => {
          const item = batch.items.find((i) => i.id === id)
          if (item === undefined) throw new Error('the batch was chosen for its item')
          return item
        },
      )
    },
  }
}

/** SenML as a gateway writes it (RFC 8428); without a time it is the receipt's. */
export const senml = (name: string, celsius: number, t_s?: number): string =>
  JSON.stringify([{ n: name, u: 'Cel', v: celsius, ...(t_s === undefined ? {} : { t: t_s }) }])

/** A small invented real site: two vials with a probe in them, one with air alone, one of each payload. */
export const smallSite = (placedAt: string) => ({
  format: 'hoarline-site/1',
  site: { id: 'lowmoor', name: 'Lowmoor Store', zone: 'Europe/Lisbon' },
  products: [
    {
      id: 'saline',
      name: 'Saline 0.9 %',
      source: 'test',
      approvedBy: 'test',
      freezing: { kind: 'osmolality', osmolality_osmol_kg: 0.287, relU: 0.02, water_kg_kg: 0.99 },
      harm: 'freezing',
      label_C: [2, 8],
      nucleation: 'clean-solution',
    },
  ],
  containers: [
    {
      id: 'vial',
      name: '10 mL vial',
      fill_kg: 0.01,
      shape: 'cylinder',
      radius_m: 0.011,
      height_m: 0.027,
      wall_kJ_K: 0.009,
      UA_W_K: 0.02,
    },
  ],
  storageUnits: [
    { id: 'CR-1', name: 'Cold room 1', kind: 'cold room' },
    { id: 'CR-2', name: 'Cold room 2', kind: 'cold room' },
  ],
  items: [
    {
      id: 'V1',
      product: 'saline',
      container: 'vial',
      count: 20,
      lot: 'LM-1',
      storageUnit: 'CR-1',
      position: 'shelf 1',
      placedAt,
      initial_C: 5,
    },
    {
      id: 'V2',
      product: 'saline',
      container: 'vial',
      count: 1,
      lot: 'LM-2',
      storageUnit: 'CR-2',
      position: 'shelf 2',
      placedAt,
      initial_C: 5,
    },
  ],
  probes: [
    {
      id: 'P1',
      placement: 'in-item',
      T90_s: 30,
      accuracy_K: 0.2,
      resolution_K: 0.05,
      interval_s: 60,
      faultCodes_C: [85],
      range_C: [-60, 60],
      source: { topic: 'lowmoor/cr1/p1', payload: 'senml', name: 'urn:dev:ow:lowmoor-p1' },
    },
    {
      id: 'A1',
      placement: 'in-air',
      T90_s: 60,
      accuracy_K: 0.2,
      interval_s: 60,
      range_C: [-60, 60],
      source: {
        topic: 'lowmoor/cr1/air',
        payload: 'json',
        value: '/t/0/c',
        time: '/ts',
        timeFormat: 'ms',
      },
    },
    {
      id: 'P2',
      placement: 'in-item',
      T90_s: 30,
      accuracy_K: 0.2,
      interval_s: 60,
      range_C: [-60, 60],
      source: { topic: 'lowmoor/cr2/p2', payload: 'number' },
    },
  ],
  assignments: [
    { probe: 'P1', to: { item: 'V1' }, from: placedAt },
    { probe: 'A1', to: { storageUnit: 'CR-1' }, from: placedAt },
    { probe: 'P2', to: { item: 'V2' }, from: placedAt },
  ],
})

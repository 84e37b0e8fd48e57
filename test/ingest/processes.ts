import { type ChildProcess, fork, spawn } from 'node:child_process'
import { createInterface } from 'node:readline'
import { fileURLToPath } from 'node:url'

const file = (name: string) => fileURLToPath(new URL(name, import.meta.url))

const gone = (child: ChildProcess): Promise<number | null> =>
  child.exitCode !== null || child.signalCode !== null
    ? Promise.resolve(child.exitCode)
    : new Promise((resolve) => child.once('exit', (code) => resolve(code)))

export type Program = {
  /** Port of its embedded broker, or null. */
  readonly port: number | null
  /** Its outside client is connected and subscribed. */
  connected(): Promise<void>
  /** kill -9, and waits until it is gone. */
  kill(): Promise<void>
  /** SIGTERM; resolves with the exit code. */
  stop(): Promise<number | null>
}

/** The intake in a process of its own; resolves when it is ready. */
export const startProgram = (given: {
  data: string
  probes: readonly object[]
  outsidePort?: number
  ackFirst?: boolean
}): Promise<Program> =>
  new Promise((resolve, reject) => {
    const child = spawn(process.execPath, [file('program.mjs'), JSON.stringify(given)], {
      stdio: ['ignore', 'pipe', 'inherit'],
    })
    child.once('exit', (code) => reject(new Error(`the program ended with ${code}`)))
    let say = () => {}
    const isConnected = new Promise<void>((resolve) => {
      say = resolve
    })
    createInterface({ input: child.stdout }).on('line', (line) => {
      const said = JSON.parse(line) as { ready?: boolean; port?: number | null; state?: string }
      if (said.state === 'connected') say()
      if (said.ready !== true) return
      resolve({
        port: said.port ?? null,
        connected: () => isConnected,
        async kill() {
          child.kill('SIGKILL')
          await gone(child)
        },
        stop() {
          child.kill('SIGTERM')
          return gone(child)
        },
      })
    })
  })

export type OtherBroker = {
  readonly port: number
  /** Told of each PUBACK that reaches the broker. */
  onAck(listener: (clientId: string) => void): void
  kill(): Promise<void>
}

/** Somebody else's broker in a process of its own; port 0 picks a free one. */
export const startOtherBroker = (port: number): Promise<OtherBroker> =>
  new Promise((resolve, reject) => {
    const child = fork(file('otherBroker.mjs'), [String(port)])
    const listeners: ((clientId: string) => void)[] = []
    child.once('exit', (code) => reject(new Error(`the broker ended with ${code}`)))
    child.on('message', (said: { port?: number; acked?: string }) => {
      if (said.acked !== undefined) for (const listener of listeners) listener(said.acked)
      if (said.port === undefined) return
      resolve({
        port: said.port,
        onAck: (listener) => void listeners.push(listener),
        async kill() {
          child.kill('SIGKILL')
          await gone(child)
        },
      })
    })
  })

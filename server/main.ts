import { Refusal } from '../config/schema/refusal.js'
import { startProgram } from './program.js'
import { help, settingsOf } from './settings.js'

/** A second signal, or a stop that takes longer than this, ends the program at once. */
const patience_ms = 15_000

const refuse = (error: unknown): never => {
  if (!(error instanceof Refusal)) throw error
  console.error(`Hoarline cannot start: ${error.message}`)
  process.exit(2)
}

try {
  const settings = settingsOf(process.argv.slice(2), process.env)
  if (settings === 'help') {
    console.log(help())
  } else {
    const program = await startProgram(settings)
    let stopping = false
    const stop = () => {
      if (stopping) process.exit(1)
      stopping = true
      setTimeout(() => process.exit(1), patience_ms).unref()
      program.stop().then(
        () => process.exit(0),
        (error) => {
          console.error(error)
          process.exit(1)
        },
      )
    }
    // Before the ready line: whoever reads it may stop us at once.
    process.on('SIGTERM', stop)
    process.on('SIGINT', stop)
    console.log(
      `Hoarline is ready: ${[program.http, program.mqtt].filter((a) => a !== null).join('  ')}`,
    )
    console.log(`Open: ${program.http}/`)
  }
} catch (error) {
  refuse(error)
}

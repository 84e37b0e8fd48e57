import { parse, refusalsOf } from '../../config/schema/parse.js'
import { Refusal } from '../../config/schema/refusal.js'

/** What a question of a headless command turns into. */
export type Answer = Readonly<Record<string, unknown>>

/** A question that cannot be answered, said in its place. */
export type RefusedAnswer = {
  readonly id: unknown
  readonly error: {
    readonly code: string
    readonly field: string
    readonly message: string
    readonly remedy: string
  }
}

/** Where questions come from and answers go. */
export type Ways = {
  readonly args: readonly string[]
  readonly input: AsyncIterable<string | Uint8Array>
  /** Resolves once the text has left; false when nobody reads any more. */
  readonly write: (text: string) => Promise<boolean>
  readonly complain: (text: string) => void
}

/** A command that answers one JSON line with one JSON line. */
export type Command = {
  readonly name: string
  /** Printed by `--help`. */
  readonly help: string
  /** @throws Refusal of a question that cannot be answered */
  readonly answer: (question: unknown) => Answer
}

/** All answered; bad usage; some lines refused (interfaces.md §4). */
export const exits = { answered: 0, usage: 2, refused: 3 } as const

/** A question longer than this is no question: 4 MiB hold 300,000 temperatures. */
const longestLine = 4 * 1024 * 1024

/** Digits that an answer bears (rulings.md 8). */
const digits = 6

/** Every number of an answer to six significant digits; -0 is 0. */
export const rounded = (value: unknown): unknown => {
  if (typeof value === 'number') return Number(value.toPrecision(digits)) + 0
  if (Array.isArray(value)) return value.map(rounded)
  if (typeof value === 'object' && value !== null)
    return Object.fromEntries(Object.entries(value).map(([key, v]) => [key, rounded(v)]))
  return value
}

/**
 * A question in its checked shape. Of several complaints a misspelt name comes first: it is most
 * often why another one is missing.
 *
 * @throws Refusal with the sender's own path
 */
export function asked<T extends Parameters<typeof parse>[0]>(
  shape: T,
  question: unknown,
): ReturnType<typeof parse<T>> {
  try {
    return parse(shape, question)
  } catch (error) {
    throw refusalsOf(shape, question).find(({ code }) => code === 'unknown-field') ?? error
  }
}

/**
 * What a room refused, with the field as the sender wrote it.
 *
 * @param at    the sender's path to what the room was given, e.g. "product"
 * @param work  may throw a Refusal whose field counts from there
 */
export function askedAt<T>(at: string, work: () => T): T {
  try {
    return work()
  } catch (error) {
    if (!(error instanceof Refusal)) throw error
    const { code, field, value, problem, remedy } = error
    throw new Refusal(code, `${at}.${field}`, value, problem, remedy, { cause: error })
  }
}

const refusedAnswer = (id: unknown, { code, field, message, remedy }: Refusal): RefusedAnswer => ({
  id,
  error: { code, field, message, remedy },
})

const idOf = (question: unknown): unknown => {
  const id =
    typeof question === 'object' && question !== null && 'id' in question ? question.id : null
  return typeof id === 'string' || typeof id === 'number' ? id : null
}

/** One line of input answered; null for a blank one. */
export function answerLine(command: Command, text: string): Answer | RefusedAnswer | null {
  if (text.trim() === '') return null
  let question: unknown
  try {
    question = JSON.parse(text)
  } catch (cause) {
    return refusedAnswer(
      null,
      new Refusal(
        'not-json',
        '(the whole)',
        text,
        'this line is not JSON',
        'write one JSON object per line',
        { cause },
      ),
    )
  }
  const id = idOf(question)
  try {
    // Cast: rounding keeps the shape of an object.
    return { id, ...(rounded(command.answer(question)) as Answer) }
  } catch (error) {
    if (error instanceof Refusal) return refusedAnswer(id, error)
    throw error
  }
}

const tooLong = (length: number): RefusedAnswer =>
  refusedAnswer(
    null,
    new Refusal(
      'too-long',
      '(the whole)',
      `${length} characters`,
      `a line has at most ${longestLine} characters`,
      'split the question',
    ),
  )

/** Lines of a stream of text; a longer one than is allowed comes as its length alone. */
async function* linesOf(input: Ways['input']): AsyncGenerator<string | number> {
  const decoder = new TextDecoder()
  let rest = ''
  let dropped = 0
  const text = function* (chunk: string): Generator<string | number> {
    const lines = (rest + chunk).split('\n')
    rest = lines.pop() ?? ''
    for (const line of lines) {
      const length = dropped + line.length
      if (length > longestLine) yield length
      else yield line
      dropped = 0
    }
    if (rest.length > longestLine || dropped > 0) {
      dropped += rest.length
      rest = ''
    }
  }
  for await (const chunk of input)
    yield* text(typeof chunk === 'string' ? chunk : decoder.decode(chunk, { stream: true }))
  if (rest !== '' || dropped > 0) yield* text('\n')
}

/** Answers are written in pieces of about this many characters. */
const pieceLength = 64 * 1024

/**
 * Runs a command: questions in, answers out, in order, one line each.
 *
 * @returns the exit status: 0 all answered, 2 bad usage, 3 some lines refused
 */
export async function ask(command: Command, ways: Ways): Promise<number> {
  if (ways.args.some((arg) => arg === '--help' || arg === '-h')) {
    await ways.write(command.help)
    return exits.answered
  }
  if (ways.args.length > 0) {
    ways.complain(
      `${command.name} takes no ${JSON.stringify(ways.args[0])}: it reads questions from its input; see --help\n`,
    )
    return exits.usage
  }
  let refused = 0
  let piece = ''
  for await (const line of linesOf(ways.input)) {
    const answer =
      typeof line === 'number' ? tooLong(line) : answerLine(command, line.replace(/^\uFEFF/, ''))
    if (answer === null) continue
    if ('error' in answer) refused++
    piece += `${JSON.stringify(answer)}\n`
    if (piece.length < pieceLength) continue
    if (!(await ways.write(piece))) return exits.answered
    piece = ''
  }
  if (piece !== '' && !(await ways.write(piece))) return exits.answered
  if (refused > 0) ways.complain(`${refused} line(s) refused; each says why in its place\n`)
  return refused > 0 ? exits.refused : exits.answered
}

/** Runs a command on the streams of this process. */
export async function runCommand(command: Command): Promise<void> {
  // A reader that has seen enough (`| head`) closes the pipe; that is its right.
  process.stdout.on('error', () => undefined)
  process.exitCode = await ask(command, {
    args: process.argv.slice(2),
    input: process.stdin,
    write: (text) =>
      new Promise((resolve) => process.stdout.write(text, (error) => resolve(!error))),
    complain: (text) => process.stderr.write(text),
  })
}

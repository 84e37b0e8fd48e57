import { physicsRates, sink, watchRate } from './rates.js'
import { messages, pipeRate, programRate } from './throughput.js'

/**
 * Speed figures, each with its ratio to a limit measured in the same run: single numbers of a
 * shared machine mean little, ratios mean something (architecture.md §6). Median of three, in turn.
 */
const rounds = 3

const median = (values: readonly number[]): number =>
  [...values].sort((a, b) => a - b)[Math.floor(values.length / 2)] ?? Number.NaN
const whole = (n: number): string => Math.round(n).toLocaleString('en')
const row = (what: string, figure: number, ratio: string, target: string) =>
  console.log(`${what.padEnd(52)} ${whole(figure).padStart(10)}   ${ratio.padEnd(34)} ${target}`)

console.log(
  'figure                                                      per s   ratio in this run                  target',
)
const physics = Array.from({ length: rounds }, physicsRates)
const fast = median(physics.map((p) => p.fast))
const exact = median(physics.map((p) => p.exact))
row(
  'physics evaluations, one core, by table',
  fast,
  `${(fast / exact).toFixed(1)} × exact equations`,
  '≥ 200,000',
)
row('physics evaluations, one core, exact', exact, '1', '–')
const watch = median(Array.from({ length: rounds }, () => watchRate(200, 120)))
row(
  'watch item updates, one core',
  watch,
  `${(watch / fast).toFixed(4)} × physics by table`,
  '≥ 50,000',
)

const pipe: number[] = []
const program: { acked: number; judged: number }[] = []
for (let k = 0; k < rounds; k++) {
  pipe.push(await pipeRate())
  program.push(await programRate())
}
const plain = median(pipe)
const acked = median(program.map((p) => p.acked))
const judged = median(program.map((p) => p.judged))
row(`plain pipe, ${whole(messages)} messages`, plain, '1', '–')
row('program: published and durable', acked, `${(acked / plain).toFixed(2)} × plain pipe`, '≥ 0.6')
row(
  'program: published, durable, judged, pushed',
  judged,
  `${(judged / plain).toFixed(2)} × plain pipe`,
  '≥ 0.6',
)
if (Number.isNaN(sink.value)) throw new Error('the physics gave no number')

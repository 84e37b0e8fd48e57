import { readFileSync } from 'node:fs'
import { readLibrary } from '../../config/library/read.js'
import { readSite } from '../../config/schema/readSite.js'
import type { Verdict } from '../../config/schema/verdict.js'
import { wordsOf } from '../../config/words/read.js'
import { judge, type RefusedLine } from '../../server/commands/judge.js'
import { planOf } from '../../server/watch/plan.js'

export type Judged = { readonly verdicts: Verdict[]; readonly refused: RefusedLine[] }

/** What `judge` answers for a site and lines, in memory. */
export const judged = async (
  site: unknown,
  lines: readonly string[],
  more: { every_ms?: number; until_ms?: number } = {},
): Promise<Judged> => {
  const verdicts: Verdict[] = []
  const refused: RefusedLine[] = []
  await judge({
    plan: planOf(readSite(site), readLibrary()),
    lines,
    every_ms: more.every_ms ?? null,
    until_ms: more.until_ms ?? null,
    say: wordsOf('en'),
    write: (answer) => {
      if ('standing' in answer) verdicts.push(answer)
      else refused.push(answer)
    },
  })
  return { verdicts, refused }
}

/** The last verdict of an item. */
export const endOf = ({ verdicts }: Judged, item: string): Verdict => {
  const last = verdicts.findLast((v) => v.item === item)
  if (last === undefined) throw new Error(`no verdict on ${item}`)
  return last
}

export const firstTurned = ({ verdicts }: Judged, item: string): Verdict | undefined =>
  verdicts.find((v) => v.item === item && v.standing === 'Turned')

export const dataFile = (name: string): string =>
  readFileSync(new URL(`./data/${name}`, import.meta.url), 'utf8')

import { neverAdvise } from './neverAdvise.js'

/** Words that pass a verdict or claim an approval, wherever a person reads them. */
export const verdictWords =
  /\b(OK|okay|safe|safely|good|fine|fit for (use|purpose|sale)|compliant|compliance with|validated (for|to)|certified (for|to)|approved for)\b/i

export type Offence = { readonly class: number; readonly said: string }

const clausesOf = (text: string): string[] =>
  text
    .split(/(?<=[.!?;:])\s+|\n+/)
    .map((clause) => clause.trim())
    .filter((clause) => clause !== '')

/** Every phrase of a text that advises what may never be advised, with its class. */
export function offences(text: string): Offence[] {
  return clausesOf(text).flatMap((clause) =>
    neverAdvise.flatMap((advice) => {
      if (advice.unless?.test(clause)) return []
      const hit = advice.patterns.some((pattern) => {
        const match = pattern.exec(clause)
        return match !== null && !advice.excusedBy.test(clause.slice(0, match.index))
      })
      return hit ? [{ class: advice.class, said: clause }] : []
    }),
  )
}

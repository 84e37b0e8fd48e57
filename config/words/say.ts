import { IntlMessageFormat } from 'intl-messageformat'
import { Refusal } from '../schema/refusal.js'

/** A catalogue: key → sentence in ICU MessageFormat. */
export type Catalogue = Readonly<Record<string, string>>

export type Values = Readonly<Record<string, string | number>>

/** Makes a sentence from its key. */
export type Say = (key: string, values?: Values) => string

/**
 * The sentences of one language, compiled once each.
 *
 * Numbers reach a sentence already written with their unit (client/format.ts, watch/explain.ts),
 * since how many digits a figure deserves is not a question of language; only counts that choose
 * a plural come as numbers.
 *
 * @param catalogues  merged; a key may stand in one only
 * @throws Refusal 'unknown-words' for a key that no catalogue has, 'duplicate' for one that two have
 */
export const sayIn = (locale: string, ...catalogues: readonly Catalogue[]): Say => {
  const words = new Map<string, string>()
  for (const catalogue of catalogues) {
    for (const [key, text] of Object.entries(catalogue)) {
      if (words.has(key))
        throw new Refusal('duplicate', key, text, 'two catalogues have this key', 'rename one')
      words.set(key, text)
    }
  }
  const compiled = new Map<string, IntlMessageFormat>()
  return (key, values = {}) => {
    let message = compiled.get(key)
    if (message === undefined) {
      const text = words.get(key)
      if (text === undefined)
        throw new Refusal(
          'unknown-words',
          'key',
          key,
          'no catalogue has it',
          'add it to config/words',
        )
      message = new IntlMessageFormat(text, locale)
      compiled.set(key, message)
    }
    return String(message.format(values as Record<string, string | number>))
  }
}

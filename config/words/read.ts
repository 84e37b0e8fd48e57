import { readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'
import { projectRoot } from '../library/read.js'
import { type Catalogue, type Say, sayIn } from './say.js'

/** The sentences of a language from its catalogues on disk, for the server and the commands. */
export const wordsOf = (language: 'en'): Say => {
  const folder = join(projectRoot(), 'config', 'words', language)
  const catalogues = readdirSync(folder)
    .filter((name) => name.endsWith('.json'))
    .sort()
    // Cast: the words test holds every catalogue to key → sentence.
    .map((name) => JSON.parse(readFileSync(join(folder, name), 'utf8')) as Catalogue)
  return sayIn(language, ...catalogues)
}

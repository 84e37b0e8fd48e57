import { existsSync, readFileSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'
import { CautionTable } from '../schema/caution.js'
import { PriorsFile, SoluteFile } from '../schema/library.js'
import { parse } from '../schema/parse.js'

/**
 * The folder that holds package.json. The same file runs from the sources and from `dist`, so the
 * way up is walked and not counted.
 */
export function projectRoot(): string {
  let folder = dirname(fileURLToPath(import.meta.url))
  while (!existsSync(join(folder, 'package.json'))) {
    const up = dirname(folder)
    if (up === folder) throw new Error('no package.json above the program: it was taken apart')
    folder = up
  }
  return folder
}

const read = <T extends Parameters<typeof parse>[0]>(
  name: string,
  shape: T,
): ReturnType<typeof parse<T>> =>
  parse(
    shape,
    JSON.parse(readFileSync(join(projectRoot(), 'config', 'library', name), 'utf8')) as unknown,
  )

/** The solute table alone: what the physics commands need. */
export function readSolutes() {
  return read('solutes.json', SoluteFile)
}

/**
 * All that the program ships as data, checked.
 *
 * @throws Refusal with the path of the first wrong entry
 */
export function readLibrary() {
  return {
    solutes: readSolutes(),
    priors: read('priors.json', PriorsFile),
    cautions: read('cautions.json', CautionTable),
  }
}

import { existsSync } from 'node:fs'
import { dirname, join } from 'node:path'
import { fileURLToPath } from 'node:url'

/** The project's folder, from its sources and from their build alike. */
export const rootFolder = (): string => {
  let dir = dirname(fileURLToPath(import.meta.url))
  while (!existsSync(join(dir, 'package.json'))) {
    const up = dirname(dir)
    if (up === dir) throw new Error('no package.json above the tests')
    dir = up
  }
  return dir
}

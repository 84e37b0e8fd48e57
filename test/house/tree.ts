import { existsSync, readdirSync, readFileSync } from 'node:fs'
import { join } from 'node:path'

/** What is made, not written: neither looked at here nor kept. */
const made = ['node_modules', 'dist', 'data', 'coverage', '.git']

/** Every file of the tree as written, with its path from the top. */
export const treeFiles = (folder = '.'): string[] =>
  readdirSync(folder, { withFileTypes: true }).flatMap((entry) => {
    if (folder === '.' && (made.includes(entry.name) || entry.name.endsWith('.log'))) return []
    const path = join(folder, entry.name)
    return entry.isDirectory() ? treeFiles(path) : [path]
  })

export const under = (room: string, ending: RegExp): string[] =>
  !existsSync(room)
    ? []
    : room.endsWith('.ts')
      ? [room]
      : treeFiles(room).filter((path) => ending.test(path))

export const read = (path: string): string => readFileSync(path, 'utf8')

/** A source without what is said about it. Line numbers stay. */
export const codeOf = (source: string): string =>
  source
    .replace(/\/\*[\s\S]*?\*\//g, (text) => text.replace(/[^\n]/g, ''))
    .replace(/(^|\s)\/\/[^\n]*/g, '$1')

export type Import = { readonly from: string; readonly typesOnly: boolean }

/** What a source imports or passes on, and whether as types alone. */
export const importsOf = (source: string): Import[] =>
  [...codeOf(source).matchAll(/^(?:import|export)\s([^'"]*?)from\s+['"]([^'"]+)['"]/gms)].map(
    ([, what = '', from = '']) => {
      const names =
        /\{([^}]*)\}/
          .exec(what)?.[1]
          ?.split(',')
          .map((name) => name.trim()) ?? []
      const eachIsType = names.filter((name) => name !== '').every((name) => /^type\s/.test(name))
      const bare = what.replace(/\{[^}]*\}/, '').replace(/[\s,]/g, '')
      return {
        from,
        typesOnly: /^type\s/.test(what) || (names.length > 0 && bare === '' && eachIsType),
      }
    },
  )

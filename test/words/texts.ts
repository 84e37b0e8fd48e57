import { existsSync, readdirSync, readFileSync, statSync } from 'node:fs'
import { join } from 'node:path'

/** A text that people read, and where it stands. */
export type Text = { readonly at: string; readonly text: string }

const filesUnder = (folder: string, ending: RegExp): string[] =>
  !existsSync(folder)
    ? []
    : readdirSync(folder).flatMap((name) => {
        const path = join(folder, name)
        if (statSync(path).isDirectory()) return filesUnder(path, ending)
        return ending.test(name) ? [path] : []
      })

const stringsIn = (value: unknown, at: string): Text[] => {
  if (typeof value === 'string') return [{ at, text: value }]
  if (typeof value !== 'object' || value === null) return []
  return Object.entries(value).flatMap(([key, inner]) => stringsIn(inner, `${at} ${key}`))
}

/** Every string of every JSON file in a folder. */
export const jsonTexts = (folder: string): Text[] =>
  filesUnder(folder, /\.json$/).flatMap((file) =>
    stringsIn(JSON.parse(readFileSync(file, 'utf8')), file),
  )

/** Lines under "Do not" are read with those words before them. */
export const cautionTexts = (file: string): Text[] =>
  (
    JSON.parse(readFileSync(file, 'utf8')) as {
      key: string
      title: string
      do: string[]
      doNot: string[]
      closing: string
    }[]
  ).flatMap((row) => [
    { at: row.key, text: row.title },
    ...row.do.map((text) => ({ at: `${row.key}, do`, text })),
    ...row.doNot.map((text) => ({
      at: `${row.key}, do not`,
      text: `Do not ${text.charAt(0).toLowerCase()}${text.slice(1)}`,
    })),
    { at: `${row.key}, closing`, text: row.closing },
  ])

/** Paragraphs of a page of prose. What stands in code marks is a program's word, not a claim. */
export const proseTexts = (file: string): Text[] =>
  !existsSync(file)
    ? []
    : readFileSync(file, 'utf8')
        .replace(/```[\s\S]*?```/g, '')
        .replace(/`[^`\n]*`/g, 'CODE')
        .split(/\n\s*\n|\n(?=[-|#])/)
        .map((paragraph) => ({ at: file, text: paragraph.replace(/\s*\n\s*/g, ' ').trim() }))
        .filter(({ text }) => text !== '')

const withoutComments = (source: string): string =>
  source.replace(/\/\*[\s\S]*?\*\//g, '').replace(/(^|\s)\/\/[^\n]*/g, '$1')

/** String literals and the text between JSX tags. */
export const literalsIn = (source: string): string[] => {
  const code = withoutComments(source)
    .split('\n')
    .filter((text) => !/^\s*(import\b|export .* from\b|\} from\b)/.test(text))
    .join('\n')
  const quoted = code.match(/'(?:[^'\\\n]|\\.)*'|"(?:[^"\\\n]|\\.)*"|`(?:[^`\\]|\\.)*`/g) ?? []
  const between = [...code.matchAll(/>([^<>{}=;()]*[A-Za-z][^<>{}=;()]*)</g)].map((m) => m[1] ?? '')
  return [...quoted.map((text) => text.slice(1, -1)), ...between.map((text) => text.trim())].filter(
    (text) => text !== '',
  )
}

/** What a page says before any script runs. */
export const htmlTexts = (folder: string): Text[] =>
  filesUnder(folder, /\.html$/).flatMap((file) =>
    [...readFileSync(file, 'utf8').matchAll(/>([^<>]*\w[^<>]*)<|content="([^"]*)"/g)].map(
      ([, between, content]) => ({ at: file, text: (between ?? content ?? '').trim() }),
    ),
  )

export const literalTexts = (folder: string): Text[] =>
  filesUnder(folder, /\.(ts|tsx)$/).flatMap((file) =>
    literalsIn(readFileSync(file, 'utf8')).map((text) => ({ at: file, text })),
  )

import type { z } from 'zod'
import { Refusal } from './refusal.js'

type Issue = z.core.$ZodIssue

/** `['probes', 3, 'T90_s']` as people write it: `probes[3].T90_s`. */
const pathOf = (path: readonly PropertyKey[]): string =>
  path.reduce<string>(
    (text, part) =>
      typeof part === 'number'
        ? `${text}[${part}]`
        : text === ''
          ? String(part)
          : `${text}.${String(part)}`,
    '',
  )

const valueAt = (root: unknown, path: readonly PropertyKey[]): unknown =>
  path.reduce<unknown>(
    (value, part) =>
      typeof value === 'object' && value !== null
        ? (value as Record<PropertyKey, unknown>)[part]
        : undefined,
    root,
  )

/** Edits (insert, delete, replace) that turn one word into another (Levenshtein 1966). */
export const editDistance = (a: string, b: string): number => {
  let row = Array.from({ length: b.length + 1 }, (_, j) => j)
  for (let i = 1; i <= a.length; i++) {
    const next = [i]
    for (let j = 1; j <= b.length; j++) {
      next.push(
        Math.min(
          (next[j - 1] ?? 0) + 1,
          (row[j] ?? 0) + 1,
          (row[j - 1] ?? 0) + (a[i - 1] === b[j - 1] ? 0 : 1),
        ),
      )
    }
    row = next
  }
  return row[b.length] ?? 0
}

/** The known word nearest to one that was written, or null when none is near. */
export const nearest = (word: string, known: readonly string[]): string | null => {
  const ranked = known
    .map((k) => ({ k, d: editDistance(word.toLowerCase(), k.toLowerCase()) }))
    .sort((x, y) => x.d - y.d)
  const best = ranked[0]
  return best !== undefined && best.d <= Math.max(2, Math.floor(best.k.length / 3)) ? best.k : null
}

/** The keys an object at this place may have: needed to name the nearest known one. */
const keysAt = (schema: unknown, path: readonly PropertyKey[]): string[] => {
  const step = (s: unknown, part: PropertyKey | null): unknown[] => {
    const def = (s as { _zod?: { def?: Record<string, unknown> } })?._zod?.def
    if (def === undefined) return []
    if ('innerType' in def) return step(def.innerType, part)
    if (Array.isArray(def.options)) return def.options.flatMap((o) => step(o, part))
    if (part === null) return [s]
    if ('element' in def && typeof part === 'number') return [def.element]
    if (Array.isArray(def.items) && typeof part === 'number') return [def.items[part]]
    const shape = def.shape as Record<PropertyKey, unknown> | undefined
    return shape !== undefined && part in shape ? [shape[part]] : []
  }
  const ends = path
    .reduce<unknown[]>((at, part) => at.flatMap((s) => step(s, part)), [schema])
    .flatMap((s) => step(s, null))
  return ends.flatMap((s) => {
    const shape = (s as { _zod?: { def?: { shape?: object } } })._zod?.def?.shape
    return shape === undefined ? [] : Object.keys(shape)
  })
}

/** In a union, the branch that fits best: a wrong discriminant first, else the fewest complaints. */
const flatten = (
  issue: Issue,
  prefix: readonly PropertyKey[],
): { issue: Issue; path: PropertyKey[] }[] => {
  const path = [...prefix, ...issue.path]
  if (issue.code === 'invalid_union' && issue.errors.length > 0) {
    const deep = issue.errors.map((branch) => branch.flatMap((i) => flatten(i as Issue, path)))
    const unknownKeys = (branch: { issue: Issue }[]) =>
      branch.filter(({ issue: i }) => i.code === 'unrecognized_keys' || i.code === 'invalid_type')
        .length
    return (
      [...deep].sort((a, b) => unknownKeys(a) - unknownKeys(b) || a.length - b.length)[0] ?? [
        { issue, path },
      ]
    )
  }
  return [{ issue, path }]
}

const article = (type: string) => (/^[aeiou]/.test(type) ? `an ${type}` : `a ${type}`)

/** A word that is not among the known ones, with the nearest of them. */
const notAmong = (field: string, value: unknown, known: readonly string[]): Refusal => {
  const all = known.map((k) => JSON.stringify(k)).join(', ')
  if (value === undefined)
    return new Refusal('missing', field, value, 'it is missing', `give one of ${all}`)
  const near = typeof value === 'string' ? nearest(value, known) : null
  const remedy = near === null ? `give one of ${all}` : `did you mean "${near}"? known: ${all}`
  return new Refusal('unknown-value', field, value, 'it is not one of the known values', remedy)
}

/** Problem and remedy of one complaint of zod, in the words a person can act on. */
const explain = (issue: Issue, schema: unknown, root: unknown, path: PropertyKey[]): Refusal[] => {
  const at = (p: readonly PropertyKey[]) => pathOf(p) || '(the whole)'
  if (issue.code === 'unrecognized_keys') {
    const known = keysAt(schema, path)
    return issue.keys.map((key) => {
      const near = nearest(key, known)
      const remedy =
        near !== null
          ? `did you mean "${near}"?`
          : known.length > 0
            ? `known here: ${known.join(', ')}`
            : 'leave it out'
      return new Refusal(
        'unknown-field',
        at([...path, key]),
        valueAt(root, [...path, key]),
        'nothing of this name is known here',
        remedy,
      )
    })
  }
  const value = valueAt(root, path)
  const remedy =
    'params' in issue ? (issue.params as { remedy?: string } | undefined)?.remedy : undefined
  if (issue.code === 'custom')
    return [new Refusal('refused', at(path), value, issue.message, remedy ?? 'correct it')]
  if (issue.code === 'invalid_type' && value === undefined)
    return [
      new Refusal('missing', at(path), value, 'it is missing', `give ${article(issue.expected)}`),
    ]
  if (issue.code === 'invalid_type')
    return [
      new Refusal(
        'wrong-type',
        at(path),
        value,
        `this is not ${article(issue.expected)}`,
        `give ${article(issue.expected)}`,
      ),
    ]
  if (issue.code === 'invalid_value') return [notAmong(at(path), value, issue.values.map(String))]
  if (issue.code === 'invalid_union' && 'discriminator' in issue)
    return [
      notAmong(at(path), value, 'options' in issue ? (issue.options as unknown[]).map(String) : []),
    ]
  return [new Refusal('refused', at(path), value, issue.message, remedy ?? 'correct it')]
}

/** Every reason why a value does not fit a shape, each with the sender's own path; empty when it fits. */
export const refusalsOf = (schema: z.ZodType, value: unknown): Refusal[] => {
  const result = schema.safeParse(value)
  if (result.success) return []
  return result.error.issues
    .flatMap((issue) => flatten(issue, []))
    .flatMap(({ issue, path }) => explain(issue, schema, value, path))
}

/**
 * A value in its checked shape, defaults filled in. The only caller of zod's parser.
 *
 * @throws Refusal of the first complaint: path, value, problem, remedy, nearest known name
 */
export const parse = <T extends z.ZodType>(schema: T, value: unknown): z.output<T> => {
  const result = schema.safeParse(value)
  if (result.success) return result.data
  throw (
    refusalsOf(schema, value)[0] ??
    new Refusal('refused', '(the whole)', value, result.error.message, 'correct it')
  )
}

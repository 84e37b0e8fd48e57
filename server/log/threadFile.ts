/**
 * The built file of a thread that stands beside the caller. Node 20 runs no TypeScript, so where
 * the caller itself runs from source (the tests), the thread runs from `dist`, which `npm test`
 * builds first.
 *
 * @param name  of the file, without its ending
 * @param from  `import.meta.url` of the caller
 */
export const threadFile = (name: string, from: string): URL => {
  const beside = new URL(`./${name}.js`, from)
  if (!from.endsWith('.ts')) return beside
  const root = new URL('../../', import.meta.url)
  return new URL(`dist/${beside.href.slice(root.href.length)}`, root)
}

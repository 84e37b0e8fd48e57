/**
 * What a JSON Pointer (RFC 6901) points at, or undefined where nothing is. Only own properties
 * count: `/constructor` finds nothing in `{}`.
 *
 * @param pointer  its form was checked with the site file
 */
export const at = (document: unknown, pointer: string): unknown => {
  if (pointer === '') return document
  let here: unknown = document
  for (const raw of pointer.slice(1).split('/')) {
    const token = raw.replaceAll('~1', '/').replaceAll('~0', '~') // in this order: "~01" is "~1"
    if (Array.isArray(here)) {
      // No leading zeros; "-" is the place after the last one, where nothing is (RFC 6901 §4).
      here = /^(0|[1-9]\d*)$/.test(token) ? here[Number(token)] : undefined
    } else if (typeof here === 'object' && here !== null && Object.hasOwn(here, token)) {
      here = (here as Record<string, unknown>)[token]
    } else return undefined
  }
  return here
}

import { existsSync } from 'node:fs'
import { join } from 'node:path'
import { expect, test } from 'vitest'
import { projectRoot } from '../../config/library/read.js'
import { PriorsFile, SoluteFile } from '../../config/schema/library.js'
import { refusalsOf } from '../../config/schema/parse.js'
import { NucleationClass } from '../../config/schema/product.js'
import { library } from './table.js'

test('the root is the folder of package.json', () => {
  expect(existsSync(join(projectRoot(), 'package.json'))).toBe(true)
})

test('every number of a solute has its source', () => {
  for (const s of library.solutes.solutes) {
    expect(library.solutes.sources).toHaveProperty(s.source)
    expect(library.solutes.sources).toHaveProperty(s.cpSource)
  }
})

test('every nucleation class of a product has its prior', () => {
  expect(Object.keys(library.priors.classes).sort()).toEqual([...NucleationClass.options].sort())
})

test('a table with a wrong entry is refused by its path', () => {
  const [first, ...rest] = library.solutes.solutes
  const wrong = { ...library.solutes, solutes: [{ ...first, molarMass_kg_mol: -1 }, ...rest] }
  expect(refusalsOf(SoluteFile, wrong).map((r) => r.field)).toEqual(['solutes[0].molarMass_kg_mol'])
  const { dairy: _, ...fewer } = library.priors.classes
  expect(refusalsOf(PriorsFile, { ...library.priors, classes: fewer })).not.toEqual([])
})

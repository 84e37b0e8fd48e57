import { spawnSync } from 'node:child_process'
import { describe, expect, test } from 'vitest'
import { type Answer, answerLine, ask, rounded, type Ways } from '../../server/commands/ask.js'
import { curveCommand } from '../../server/commands/curve.js'
import { freezeCommand } from '../../server/commands/freeze.js'
import { library } from './table.js'

const freeze = freezeCommand(library.solutes)
const curve = curveCommand(library.solutes)

const product = {
  freezing: { kind: 'solution', solutes: [{ name: 'sodium chloride', kg_kg: 0.009 }] },
}
const container = { fill_kg: 0.01, wall_kJ_K: 0.009, UA_W_K: 0.02 }
const question = { id: 'q1', product, container, from_C: -8, air_C: -10 }

const run = async (
  command: typeof freeze,
  input: string | readonly Uint8Array[],
  args: readonly string[] = [],
  reads: (text: string) => boolean = () => true,
) => {
  const out: string[] = []
  const complaints: string[] = []
  const ways: Ways = {
    args,
    input: (async function* () {
      yield* typeof input === 'string' ? [input] : input
    })(),
    write: async (text) => {
      out.push(text)
      return reads(text)
    },
    complain: (text) => complaints.push(text),
  }
  const status = await ask(command, ways)
  const text = out.join('')
  const answers = (): Answer[] =>
    text
      .split('\n')
      .filter((line) => line !== '')
      .map((line) => JSON.parse(line) as Answer)
  return { status, text, complaints: complaints.join(''), answers }
}

/** The only answer to a question. */
const answerTo = async (command: typeof freeze, asked: object): Promise<Answer> => {
  const { answers } = await run(command, `${JSON.stringify(asked)}\n`)
  return answers()[0]!
}

const errorOf = (answer: Answer) =>
  answer.error as { code: string; field: string; message: string; remedy: string }

describe('freeze', () => {
  test('answers every field of the sheet, in six digits', async () => {
    const answer = await answerTo(freeze, question)
    expect(Object.keys(answer)).toEqual([
      'id',
      'freezingPoint_C',
      'freezingPoint_u_K',
      'supercooling_K',
      'end_C',
      'firstIce_kg_kg',
      'firstIce_ofWater',
      'jump_K',
      'latentHeatAtEnd_kJ_kg',
      'heatNow_kJ_kg',
      'heatToSolid_kJ_kg',
      'iceAtAir_kg_kg',
      'drivingForce_J_kg',
      'entropyProduction_J_kgK',
      'solid_h',
      'settlesAt_kg_kg',
      'settle_h',
      'flags',
    ])
    expect(answer).toMatchObject({ id: 'q1', supercooling_K: 7.47231, settlesAt_kg_kg: null })
    for (const value of Object.values(answer).flat())
      if (typeof value === 'number') expect(Number(value.toPrecision(6))).toBe(value)
  })

  test('an isotonic vial at −8 °C: −0.596 °C, 11.3 % ice, driven with 8.89 kJ/kg', async () => {
    const a = (await answerTo(freeze, question)) as Record<string, number>
    expect(a.end_C).toBeCloseTo(-0.596, 3)
    expect(a.firstIce_kg_kg).toBeCloseTo(0.1132, 3)
    expect(a.drivingForce_J_kg).toBeCloseTo(-8889, -1)
    expect(a.heatNow_kJ_kg).toBeCloseTo(a.firstIce_kg_kg! * a.latentHeatAtEnd_kJ_kg!, 3)
    expect(a.entropyProduction_J_kgK).toBeCloseTo(-a.drivingForce_J_kg! / 265.15, 3)
    expect(a.firstIce_ofWater).toBeCloseTo(a.firstIce_kg_kg! / 0.991, 5)
  })

  test('at or above the freezing point nothing happens', async () => {
    const answer = await answerTo(freeze, { ...question, from_C: 5 })
    expect(answer).toMatchObject({
      supercooling_K: 0,
      end_C: 5,
      firstIce_kg_kg: 0,
      firstIce_ofWater: 0,
      jump_K: 0,
      heatNow_kJ_kg: 0,
    })
    expect(answer.drivingForce_J_kg).toBeGreaterThan(0)
  })

  test('what is not known is null: no air, no coupling', async () => {
    const { air_C: _, ...noAir } = question
    expect(await answerTo(freeze, noAir)).toMatchObject({ iceAtAir_kg_kg: null, solid_h: null })
    const noCoupling = await answerTo(freeze, { ...question, container: { fill_kg: 0.01 } })
    expect(noCoupling.solid_h).toBeNull()
    expect(noCoupling.heatToSolid_kJ_kg).toBeGreaterThan(200)
    const { container: __, ...bare } = question
    expect((await answerTo(freeze, bare)).solid_h).toBeNull()
  })

  test('air above the freezing point makes nothing solid', async () => {
    expect(await answerTo(freeze, { ...question, air_C: 1 })).toMatchObject({
      heatToSolid_kJ_kg: null,
      solid_h: null,
      settlesAt_kg_kg: 0,
    })
  })

  test('a film and a shape stand for a coupling', async () => {
    const film = { fill_kg: 0.01, shape: 'cylinder', radius_m: 0.011, height_m: 0.03, h_W_m2K: 8 }
    const a = await answerTo(freeze, { ...question, container: film })
    const b = await answerTo(freeze, {
      ...question,
      container: { fill_kg: 0.01, UA_W_K: 8 * 2 * Math.PI * 0.011 * 0.041 },
    })
    expect(a.solid_h).toEqual(b.solid_h)
  })

  test('a product and a container of a site file may be pasted as they are', async () => {
    const pasted = {
      ...question,
      product: { id: 'saline-09', name: 'Saline', harm: 'freezing', label_C: [2, 8], ...product },
      container: { id: 'vial-10R', name: '10R', ...container },
    }
    expect(await answerTo(freeze, pasted)).toEqual(await answerTo(freeze, question))
  })

  test('an extrapolated figure and a eutectic that may stay liquid are flagged', async () => {
    const strong = {
      freezing: { kind: 'solution', solutes: [{ name: 'sucrose', kg_kg: 0.3 }] },
    }
    expect((await answerTo(freeze, { ...question, product: strong })).flags).toEqual([
      'extrapolated',
    ])
    const eutectic = { ...product, stop: { T_C: -21.2, kind: 'eutectic' } }
    expect((await answerTo(freeze, { ...question, product: eutectic, air_C: -25 })).flags).toEqual([
      'extrapolated',
      'may stay liquid: eutectics supercool too',
    ])
    expect((await answerTo(freeze, question)).flags).toEqual([])
  })

  test.each([
    { kind: 'measured', freezingPoint_C: -0.53, water_kg_kg: 0.99, bound_kg_kg: 0, u_K: 0.02 },
    { kind: 'osmolality', osmolality_osmol_kg: 0.287, relU: 0.02, water_kg_kg: 0.99 },
    { kind: 'solution', solutes: [{ name: 'NaCl', kg_kg: 0.009 }], relU: 0.03 },
    { kind: 'food', water_kg_kg: 0.745, protein_kg_kg: 0.2, freezingPoint_C: -1.7, u_K: 0.3 },
    { kind: 'water' },
  ])('takes the form $kind', async (freezing) => {
    const answer = await answerTo(freeze, { id: 1, product: { freezing }, from_C: -5 })
    expect(answer).toMatchObject({ id: 1 })
    expect(answer.firstIce_kg_kg).toBeGreaterThan(0.01)
  })
})

describe('curve', () => {
  test('gives both branches at the temperatures asked for', async () => {
    const answer = await answerTo(curve, {
      id: 'c1',
      product,
      temperatures_C: [5, -5, -40],
    })
    const points = answer.points as Record<string, number>[]
    expect(points.map((p) => p.T_C)).toEqual([5, -5, -40])
    expect(Object.keys(points[0]!)).toEqual([
      'T_C',
      'liquid_h_kJ_kg',
      'equilibrium_h_kJ_kg',
      'ice_kg_kg',
      'liquidOsmolality_osmol_kg',
      'cpApparent_kJ_kgK',
    ])
    expect(points[0]).toMatchObject({ ice_kg_kg: 0 })
    expect(points[0]!.equilibrium_h_kJ_kg).toBe(points[0]!.liquid_h_kJ_kg)
    expect(points[1]!.ice_kg_kg).toBeGreaterThan(0.85)
  })

  test('below the stop ice and osmolality stay as they are there', async () => {
    const answer = await answerTo(curve, {
      id: 'c2',
      product: { ...product, stop_C: -21.2 },
      temperatures_C: [-21.2, -30, -40],
    })
    const [at, ...below] = answer.points as Record<string, number>[]
    for (const point of below) {
      expect(point.ice_kg_kg).toBe(at!.ice_kg_kg)
      expect(point.liquidOsmolality_osmol_kg).toBe(at!.liquidOsmolality_osmol_kg)
    }
  })

  test('no temperatures, no points', async () => {
    expect(await answerTo(curve, { id: 'c', product, temperatures_C: [] })).toMatchObject({
      points: [],
      flags: [],
    })
  })

  test.each([-40.5, 61])('refuses %d °C by its place, and names the range', async (t_C) => {
    const error = errorOf(await answerTo(curve, { id: 'c', product, temperatures_C: [0, t_C] }))
    expect(error).toMatchObject({ code: 'out-of-range', field: 'temperatures_C[1]' })
    expect(error.message).toContain('-40 to 60')
  })
})

describe('refusals', () => {
  test.each([
    {
      asked: { ...question, from_C: -45 },
      code: 'out-of-range',
      field: 'from_C',
      says: '-40 to 60',
    },
    {
      asked: { ...question, from_C: 1e9 },
      code: 'out-of-range',
      field: 'from_C',
      says: '-40 to 60',
    },
    { asked: { ...question, from_c: -8 }, code: 'unknown-field', field: 'from_c', says: 'from_C' },
    { asked: { ...question, from_C: '−8' }, code: 'wrong-type', field: 'from_C', says: 'number' },
    { asked: { ...question, from_C: undefined }, code: 'missing', field: 'from_C', says: 'number' },
    { asked: { ...question, air_C: -300 }, code: 'refused', field: 'air_C', says: '273.15' },
    {
      asked: { ...question, product: { ...product, stopC: -3 } },
      code: 'unknown-field',
      field: 'product.stopC',
      says: 'stop_C',
    },
    {
      asked: { ...question, product: { ...product, stop_C: -0.1 } },
      code: 'stop-above-freezing',
      field: 'product.stop_C',
      says: '-0.53',
    },
    {
      asked: { ...question, product: { freezing: { kind: 'watr' } } },
      code: 'unknown-value',
      field: 'product.freezing.kind',
      says: '"water"',
    },
    {
      asked: {
        ...question,
        product: {
          freezing: { kind: 'solution', solutes: [{ name: 'sodium clorid', kg_kg: 0.01 }] },
        },
      },
      code: 'unknown-solute',
      field: 'product.freezing.solutes[0].name',
      says: '"sodium chloride"',
    },
    {
      asked: {
        ...question,
        product: { freezing: { kind: 'solution', solutes: [{ name: 'NaCl', kg_kg: 1.2 }] } },
      },
      code: 'refused',
      field: 'product.freezing.solutes[0].kg_kg',
      says: 'between 0 and 1',
    },
    {
      asked: {
        ...question,
        product: {
          freezing: {
            kind: 'measured',
            freezingPoint_C: -0.5,
            water_kg_kg: 0.9,
            bound_kg_kg: 0.95,
          },
        },
      },
      code: 'all-bound',
      field: 'product.freezing.bound_kg_kg',
      says: 'less bound',
    },
    {
      asked: { ...question, container: { ...container, fill_kg: 0 } },
      code: 'refused',
      field: 'container.fill_kg',
      says: 'kg of product',
    },
    {
      asked: { ...question, container: { fill_kg: 0.01, h_W_m2K: 8 } },
      code: 'missing',
      field: 'container.shape',
      says: 'UA_W_K',
    },
  ])('$field: $code, and it says $says', async ({ asked, code, field, says }) => {
    const answer = await answerTo(freeze, asked)
    expect(answer.id).toBe('q1')
    expect(errorOf(answer)).toMatchObject({ code, field })
    const { message, remedy } = errorOf(answer)
    expect(message).toContain(says)
    expect(remedy).not.toBe('')
    expect(message).not.toMatch(/undefined is|invalid input|\bat .*\.ts/i)
  })

  test.each(['{', 'null', '[1]', '"a"', '12'])('%s is no question', (text) => {
    const answer = answerLine(freeze, text)
    expect(answer).toMatchObject({ id: null, error: { code: expect.any(String) } })
  })
})

describe('lines', () => {
  const line = JSON.stringify(question)

  test('each answer stands where its question stood; blank lines, CRLF and a byte-order mark pass', async () => {
    const other = JSON.stringify({ ...question, id: 'q2' })
    const { status, answers } = await run(freeze, `\uFEFF${line}\r\n\r\n   \n${other}`)
    expect(answers().map((a) => a.id)).toEqual(['q1', 'q2'])
    expect(status).toBe(0)
  })

  test('a refused line does not stop the next; the status is 3', async () => {
    const { status, answers, complaints } = await run(freeze, `{\n${line}\n`)
    expect(answers().map((a) => a.id)).toEqual([null, 'q1'])
    expect(status).toBe(3)
    expect(complaints).toContain('1 line')
  })

  test('lines may come in any pieces, in the middle of a letter too', async () => {
    const text = `${JSON.stringify({ ...question, id: 'Kühlraum −8 °C' })}\n${line}\n`
    const bytes = new TextEncoder().encode(text)
    const pieces = Array.from(bytes, (_, i) => bytes.slice(i, i + 1))
    const { answers } = await run(freeze, pieces)
    expect(answers().map((a) => a.id)).toEqual(['Kühlraum −8 °C', 'q1'])
  })

  test('an endless line is refused by its length and does not fill the memory', async () => {
    const piece = 'x'.repeat(1024 * 1024)
    const { answers, status } = await run(freeze, [
      ...Array.from({ length: 6 }, () => new TextEncoder().encode(piece)),
      new TextEncoder().encode(`\n${line}\n`),
    ])
    expect(answers()).toMatchObject([{ id: null, error: { code: 'too-long' } }, { id: 'q1' }])
    expect(status).toBe(3)
  })

  test('nothing in, nothing out', async () => {
    expect(await run(freeze, '')).toMatchObject({ status: 0, text: '' })
  })

  test('a reader that leaves ends the work without a complaint', async () => {
    const many = `${line}\n`.repeat(2000)
    const { status, text, complaints } = await run(freeze, many, [], () => false)
    expect(status).toBe(0)
    expect(text.length).toBeLessThan(200_000)
    expect(complaints).toBe('')
  })

  test('--help says how, to whoever asks', async () => {
    for (const command of [freeze, curve]) {
      const { status, text } = await run(command, '', ['--help'])
      expect(status).toBe(0)
      expect(text).toContain(`npm run -s ${command.name}`)
    }
  })

  test('an argument it does not know is bad usage: 2, and nothing on stdout', async () => {
    const { status, text, complaints } = await run(freeze, line, ['--fast'])
    expect(status).toBe(2)
    expect(text).toBe('')
    expect(complaints).toContain('--fast')
  })

  test('the examples of the help are answered', () => {
    for (const command of [freeze, curve]) {
      const from = command.help.indexOf('{"id"')
      const example = command.help.slice(from, command.help.indexOf('\n\n', from))
      expect(answerLine(command, example.replaceAll('\n', ' '))).not.toHaveProperty('error')
    }
  })

  test('numbers are rounded to six digits wherever they stand, and -0 is 0', () => {
    expect(rounded({ a: 1 / 3, b: [-1e-20 / 3, -0], c: null, d: 'x' })).toEqual({
      a: 0.333333,
      b: [-3.33333e-21, 0],
      c: null,
      d: 'x',
    })
  })
})

test('the built command answers on its streams, and exits with its status', () => {
  const input = `${JSON.stringify(question)}\nnot json\n`
  const build = spawnSync(process.execPath, ['config/tools/ensure-build.mjs', 'server'])
  expect(build.status).toBe(0)
  const { status, stdout, stderr } = spawnSync(
    process.execPath,
    ['dist/server/commands/freeze.js'],
    { input, encoding: 'utf8' },
  )
  expect(
    stdout
      .trim()
      .split('\n')
      .map((l) => (JSON.parse(l) as Answer).id),
  ).toEqual(['q1', null])
  expect(stderr).toContain('1 line')
  expect(status).toBe(3)
})

// Who may import whom: one line per room; DEVELOPERS.md says it in words. What a line does not name
// is refused.
//
// These rules hold for values, circles included. Types are gone before anything runs, so two files
// may share a shape both ways; but a room that may know another's shape only is said here too, and
// test/house/importRules.test.ts reads that from the rules of severity 'ignore'.

const swc = require('@swc/core')

const isType = ({ type, typeOnly, specifiers = [] }) =>
  typeOnly === true ||
  (type === 'ImportDeclaration' && specifiers.length > 0 && specifiers.every((s) => s.isTypeOnly))

// The cruiser asks this parser for TypeScript without JSX and does not tell a type from a value; it
// has no option to say otherwise. So both are said here, where it looks for the parser.
const { parseFileSync } = swc
swc.parseFileSync = (file, options) => {
  const parsed = parseFileSync(file, { ...options, tsx: file.endsWith('.tsx') })
  return { ...parsed, body: parsed.body.filter((statement) => !isType(statement)) }
}

const schema = '^config/schema/'
const refusal = '^config/schema/refusal\\.ts$'
const schemaButRefusal = '^config/schema/(?!refusal\\.ts$)'
const seam = '^server/seam\\.ts$'
const siteClock = '^server/siteClock\\.ts$'
const words = '^config/words/'
const library = '^config/library/'
const physics = '^server/physics/'
const watch = '^server/watch/'
const watching = '^server/watching\\.ts$'
const store = '^server/store/'

/** A package, in whichever node_modules it lies; or parts of Node itself. */
const pack = (...names) => `(^|/)node_modules/(${names.join('|')})/`
const node = (...names) => `^(node:)?(${names.join('|')})$`

const only = (name, room, allowed, asTypes = []) => [
  {
    name,
    severity: 'error',
    from: { path: room },
    to: { pathNot: [room, ...allowed] },
  },
  ...(asTypes.length === 0
    ? []
    : [
        {
          name: `as types: ${name}`,
          severity: 'ignore',
          from: { path: room },
          to: { path: asTypes },
        },
      ]),
]

/** Rooms whose results are kept: what keeps them knows their shape and never calls them. */
const judged = [watch, '^server/(alarms|record)/']

const files = node('fs', 'fs/promises', 'path', 'url')
const mqttPackages = pack('aedes', 'mqtt', 'mqtt-packet')

module.exports = {
  forbidden: [
    { name: 'no circles', severity: 'error', from: {}, to: { circular: true } },
    {
      name: 'what is imported is there',
      severity: 'error',
      from: {},
      to: { couldNotResolve: true },
    },
    {
      name: 'nobody imports test',
      severity: 'error',
      from: { pathNot: '^test/' },
      to: { path: '^test/' },
    },
    {
      name: 'nobody imports main',
      severity: 'error',
      from: { pathNot: '^server/main\\.ts$' }, // which starts the program that joins the rooms
      to: { path: '^(server/(main|program)\\.ts|client/main\\.tsx)$' },
    },

    ...only('schema knows shapes alone', schema, [pack('zod')]),
    ...only('library is read by one file', library, [schema, files]),
    ...only('words know sentences', words, [schema, library, files, pack('intl-messageformat')]),

    ...only('physics stands alone', physics, [refusal], [schemaButRefusal]),
    ...only('watch is pure', watch, [physics, schema]),
    ...only('decode is pure', '^server/decode/', [schema, pack('cbor-x')], [seam]),
    ...only('alarms are pure', '^server/alarms/', [physics, schema, node('crypto')]),
    ...only('record is pure', '^server/record/', [
      physics,
      schema,
      words,
      node('crypto'),
      pack('pdfkit'),
    ]),

    ...only(
      'log keeps',
      '^server/log/',
      [
        schema,
        seam,
        store, // one file owns a table: the log asks it, and has no SQL of its own
        pack('better-sqlite3'),
        node('worker_threads', 'fs', 'path', 'url'), // the writer is a thread of its own
      ],
      judged,
    ),
    ...only(
      'store is SQL and nothing else',
      store,
      [schema, seam, pack('better-sqlite3'), node('fs', 'path', 'url', 'crypto')],
      [...judged, watching],
    ),
    ...only('mqtt carries bytes', '^server/mqtt/', [
      schema,
      seam,
      mqttPackages,
      node('net', 'tls', 'events', 'stream', 'fs', 'crypto'),
    ]),
    ...only('live tells', '^server/live/', [schema, seam, pack('socket\\.io'), node('http')]),
    ...only('notify sends', '^server/notify\\.ts$', [schema, seam, pack('nodemailer')]),
    ...only('people sign in', '^server/people/', [schema, node('crypto'), pack('otpauth')]),
    ...only(
      'api answers',
      '^server/api/',
      [
        '^server/(people|record|alarms)/',
        '^server/board\\.ts$', // the main thread's picture of the site, which it sends out
        physics,
        store,
        schema,
        words,
        seam,
        siteClock, // the demo's speed is changed by a route
        pack('express', 'helmet', 'zod', 'rate-limiter-flexible'),
        node('http', 'fs', 'path', 'url'),
      ],
      ['^server/watcher\\.ts$', watching],
    ),
    ...only('watcher holds the watch thread', '^server/watcher\\.ts$', [
      '^server/log/threadFile\\.ts$', // both threads are started the same way
      schema,
      seam,
      watching,
      node('worker_threads'),
    ]),
    ...only('commands use what the server uses', '^server/commands/', [
      '^server/(decode|record|log)/',
      '^server/settings\\.ts$', // where the data lie
      physics,
      watch,
      store,
      schema,
      words,
      library,
      seam,
      node('fs', 'path', 'url', 'util', 'readline', 'process'),
    ]),
    ...only(
      'board is a picture',
      '^server/board\\.ts$',
      [schema, seam, words, siteClock, watching],
      [store],
    ),
    ...only('settings stand alone', '^server/settings\\.ts$', [schema, node('fs', 'path', 'util')]),
    ...only('a clock is a seam', siteClock, [seam]),
    ...only('threads share shapes', watching, [], [schema, seam, store, '^server/board\\.ts$']),
    ...only('history answers from store and watch', '^server/itemHistory\\.ts$', [
      schema,
      seam,
      store,
      watch,
    ]),
    ...only(
      'worker joins the watch to the log',
      '^server/worker\\.ts$',
      [
        '^server/(alarms|record)/',
        '^server/itemHistory\\.ts$',
        physics, // the two curves of one item, asked for by a screen
        watch,
        watching,
        library,
        words,
        schema,
        seam,
        store, // it reads what it missed from disk, by a connection of its own
        node('worker_threads', 'crypto'),
      ],
      ['^server/board\\.ts$'],
    ),
    ...only('sim never sees the judge', '^sim/', [
      physics,
      schema,
      library, // the same substances; the same physics run forward
      '^server/seam\\.ts$',
      pack('mqtt'),
      node('fs', 'path', 'url', 'util', 'events', 'timers/promises', 'worker_threads'),
    ]),
    ...only('client is a screen', '^client/', [
      physics,
      schema,
      '^config/words/(say\\.ts$|[a-z]{2}/)', // never read.ts: a page has no disk
      pack(
        'preact',
        '@preact/signals',
        '@preact/signals-core',
        'chart\\.js',
        'luxon',
        'socket\\.io-client',
        '@fontsource[^/]*/[^/]+',
      ),
    ]),
  ],
  options: {
    // What is written counts, not what a compiler would leave of it.
    tsPreCompilationDeps: true,
    tsConfig: { fileName: 'tsconfig.json' },
    // TypeScript 7 has no parser that this tool can use: without one that it can it would cruise no
    // module at all and say that all is well. test/house/importRules.test.ts counts the modules.
    parser: 'swc',
    doNotFollow: { path: 'node_modules' },
    enhancedResolveOptions: {
      extensions: ['.ts', '.tsx', '.mjs', '.cjs', '.js', '.json', '.css'],
      exportsFields: ['exports'],
      conditionNames: ['import', 'types', 'node', 'default'],
      mainFields: ['module', 'main', 'types'],
    },
  },
}

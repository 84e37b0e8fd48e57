import { readFileSync } from 'node:fs'
import { parseArgs } from 'node:util'
import { nearest } from '../config/schema/parse.js'
import { Refusal } from '../config/schema/refusal.js'

/** A broker of somebody else's that Hoarline listens to. */
export type OutsideBroker = {
  readonly name: string
  readonly host: string
  readonly port: number
  readonly user: string | null
  readonly password: string | null
}

export type Settings = {
  readonly host: string
  readonly port: number
  /** Port of the embedded broker; null when it is off. */
  readonly mqttPort: number | null
  readonly brokers: readonly OutsideBroker[]
  readonly data: string
  /** The site file; null means the demo site with its simulator. */
  readonly site: string | null
  readonly log: string
}

type Row = {
  readonly flag: string
  readonly variable: string
  readonly standard: string
  readonly help: string
}

const levels = ['fatal', 'error', 'warn', 'info', 'debug', 'silent']

/** Every setting, once: the flag, the variable, the default and what it is for. */
const rows = {
  port: {
    flag: 'port',
    variable: 'HOARLINE_PORT',
    standard: '8080',
    help: 'port of the pages and the API; 0 picks a free one',
  },
  host: {
    flag: 'host',
    variable: 'HOARLINE_HOST',
    standard: '127.0.0.1',
    help: 'address to listen on; loopback only until sign-in exists',
  },
  mqttPort: {
    flag: 'mqtt-port',
    variable: 'HOARLINE_MQTT_PORT',
    standard: '1883',
    help: 'port of the embedded broker; 0 picks a free one, "off" runs without it',
  },
  mqtt: {
    flag: 'mqtt',
    variable: 'HOARLINE_MQTT_URL',
    standard: '',
    help: 'outside brokers to listen to: mqtt://host:port, or name=mqtt://host:port, comma-separated',
  },
  data: {
    flag: 'data',
    variable: 'HOARLINE_DATA',
    standard: './data',
    help: 'folder of the store',
  },
  site: {
    flag: 'site',
    variable: 'HOARLINE_SITE',
    standard: '',
    help: 'site file; without it the demo site and its simulator run',
  },
  log: {
    flag: 'log',
    variable: 'HOARLINE_LOG',
    standard: 'info',
    help: `how much is logged: ${levels.join(', ')}`,
  },
} as const satisfies Record<string, Row>

const secretHelp = [
  'HOARLINE_MQTT_<NAME>_USER            user of an outside broker of that name',
  'HOARLINE_MQTT_<NAME>_PASSWORD_FILE   file that holds its password',
]

/** The text of `npm start -- --help`. */
export const help = (): string =>
  [
    'npm start -- [options]        (each option also as an environment variable)',
    '',
    ...Object.values(rows).map(
      (r) =>
        `  --${r.flag.padEnd(10)} ${r.variable.padEnd(20)} ${(r.standard || '–').padEnd(11)} ${r.help}`,
    ),
    `  --${'help'.padEnd(10)} ${''.padEnd(20)} ${''.padEnd(11)} this text`,
    '',
    ...secretHelp.map((line) => `  ${line}`),
    '',
  ].join('\n')

const loopback = ['127.0.0.1', 'localhost', '::1']

const portOf = (name: string, text: string): number => {
  const port = Number(text)
  if (/^\d+$/.test(text) && port <= 65_535) return port
  throw new Refusal(
    'not-a-port',
    name,
    text,
    'a port is a whole number from 0 to 65535',
    'give one, or 0 for a free one',
  )
}

const brokerOf = (
  name: string,
  text: string,
  environment: NodeJS.ProcessEnv,
  i: number,
): OutsideBroker => {
  const [, label, url] = /^(?:([A-Za-z0-9_-]+)=)?(.*)$/.exec(text) ?? []
  let parsed: URL
  try {
    parsed = new URL(url ?? '')
  } catch (error) {
    throw new Refusal(
      'not-a-url',
      name,
      text,
      'this is not the address of a broker',
      'write it like mqtt://127.0.0.1:1883',
      { cause: error },
    )
  }
  if (parsed.protocol !== 'mqtt:')
    throw new Refusal(
      'not-spoken',
      name,
      text,
      `"${parsed.protocol}//" is not spoken yet`,
      'use mqtt://host:port',
    )
  if (parsed.username !== '' || parsed.password !== '')
    throw new Refusal(
      'secret-in-url',
      name,
      `${parsed.protocol}//…@${parsed.host}`,
      'a password in an address ends up in logs',
      'use the _USER and _PASSWORD_FILE variables',
    )
  const id = label ?? (i === 0 ? 'outside' : `outside${i + 1}`)
  const variable = `HOARLINE_MQTT_${id.toUpperCase().replaceAll('-', '_')}`
  const file = environment[`${variable}_PASSWORD_FILE`]
  return {
    name: id,
    host: parsed.hostname.replace(/^\[|\]$/g, ''),
    port: parsed.port === '' ? 1883 : Number(parsed.port),
    user: environment[`${variable}_USER`] ?? null,
    password: file === undefined ? null : readFileSync(file, 'utf8').replace(/\r?\n$/, ''),
  }
}

/**
 * Flags and environment in one place; a flag wins over its variable.
 *
 * @returns the settings, or 'help' when the person asked for the list
 * @throws  Refusal naming the flag or variable, its value and the remedy
 */
export const settingsOf = (
  argv: readonly string[],
  environment: NodeJS.ProcessEnv,
): Settings | 'help' => {
  const flags = Object.values(rows).map((r) => r.flag)
  const options = Object.fromEntries(flags.map((flag) => [flag, { type: 'string' as const }]))
  const { values, tokens } = parseArgs({
    args: [...argv],
    options: { ...options, help: { type: 'boolean' as const } },
    strict: false,
    tokens: true,
    allowPositionals: true,
  })
  for (const token of tokens) {
    if (token.kind === 'positional')
      throw new Refusal(
        'unknown-option',
        'argument',
        token.value,
        'nothing is expected here',
        'see npm start -- --help',
      )
    if (token.kind === 'option' && token.name !== 'help') {
      if (!(flags as string[]).includes(token.name)) {
        const near = nearest(token.name, [...flags, 'help'])
        throw new Refusal(
          'unknown-option',
          token.rawName,
          token.value ?? '',
          'there is no such option',
          near === null ? 'see npm start -- --help' : `did you mean --${near}?`,
        )
      }
      if (token.value === undefined || token.value === '')
        throw new Refusal(
          'missing',
          token.rawName,
          '',
          'it has no value',
          `write --${token.name} VALUE`,
        )
    }
  }
  if (values.help === true) return 'help'

  const take = (row: Row): { name: string; text: string } => {
    const flag = values[row.flag]
    if (typeof flag === 'string') return { name: `--${row.flag}`, text: flag }
    return { name: row.variable, text: environment[row.variable] || row.standard }
  }
  const host = take(rows.host)
  if (!loopback.includes(host.text))
    throw new Refusal(
      'not-loopback',
      host.name,
      host.text,
      'nothing listens beyond loopback until sign-in exists',
      'use 127.0.0.1',
    )
  const port = take(rows.port)
  const mqttPort = take(rows.mqttPort)
  const mqtt = take(rows.mqtt)
  const brokers = mqtt.text
    .split(',')
    .map((s) => s.trim())
    .filter((s) => s !== '')
    .map((text, i) => brokerOf(mqtt.name, text, environment, i))
  const names = brokers.map((b) => b.name)
  const twice = names.find((n, i) => names.indexOf(n) !== i)
  if (twice !== undefined)
    throw new Refusal(
      'duplicate',
      mqtt.name,
      twice,
      'two brokers have this name',
      'give each its own: name=mqtt://host:port',
    )
  const log = take(rows.log)
  if (!levels.includes(log.text))
    throw new Refusal(
      'unknown-value',
      log.name,
      log.text,
      'there is no such level',
      `use one of ${levels.join(', ')}`,
    )
  return {
    host: host.text,
    port: portOf(port.name, port.text),
    mqttPort: mqttPort.text === 'off' ? null : portOf(mqttPort.name, mqttPort.text),
    brokers,
    data: take(rows.data).text,
    site: take(rows.site).text || null,
    log: log.text,
  }
}

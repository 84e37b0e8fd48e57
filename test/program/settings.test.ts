import { describe, expect, test } from 'vitest'
import { help, settingsOf } from '../../server/settings.js'
import { atSpeed, siteClock, siteTime_ms } from '../../server/siteClock.js'

describe('settings', () => {
  test('have the defaults of the interface sheet', () => {
    expect(settingsOf([], {})).toEqual({
      host: '127.0.0.1',
      port: 8080,
      mqttPort: 1883,
      brokers: [],
      data: './data',
      site: null,
      log: 'info',
    })
  })

  test('a flag wins over its variable', () => {
    expect(settingsOf(['--port', '0'], { HOARLINE_PORT: '9000' })).toMatchObject({ port: 0 })
    expect(settingsOf([], { HOARLINE_PORT: '9000' })).toMatchObject({ port: 9000 })
  })

  test('outside brokers take a name, a user and a password kept in a file', () => {
    const settings = settingsOf(['--mqtt', 'plant=mqtt://127.0.0.1:1884, mqtt://localhost'], {
      HOARLINE_MQTT_PLANT_USER: 'hoarline',
      HOARLINE_MQTT_PORT: 'off',
    })
    expect(settings).toMatchObject({
      mqttPort: null,
      brokers: [
        { name: 'plant', host: '127.0.0.1', port: 1884, user: 'hoarline', password: null },
        { name: 'outside2', host: 'localhost', port: 1883, user: null },
      ],
    })
  })

  test.each([
    { argv: ['--host', '0.0.0.0'], says: /--host is 0.0.0.0: nothing listens beyond loopback/ },
    { argv: ['--port', '80800'], says: /--port is 80800: a port is a whole number/ },
    { argv: ['--prot', '1'], says: /did you mean --port/ },
    { argv: ['--mqtt', 'mqtts://a:1'], says: /not spoken yet/ },
    { argv: ['--mqtt', 'mqtt://me:secret@a:1'], says: /password in an address/ },
    { argv: ['--log', 'loud'], says: /use one of fatal/ },
    { argv: ['serve'], says: /nothing is expected here/ },
  ])('$argv is refused with its name, value and remedy', ({ argv, says }) => {
    expect(() => settingsOf(argv, {})).toThrow(says)
  })

  test('a password in an address is not repeated in the message', () => {
    expect(() => settingsOf(['--mqtt', 'mqtt://me:secret@a:1'], {})).not.toThrow(/secret/)
  })

  test('--help lists every flag with its variable', () => {
    expect(settingsOf(['--help'], {})).toBe('help')
    for (const name of ['PORT', 'HOST', 'MQTT_PORT', 'MQTT_URL', 'DATA', 'SITE', 'LOG'])
      expect(help()).toContain(`HOARLINE_${name}`)
  })
})

describe('the site clock', () => {
  test('is the wall clock on a real site', () => {
    expect(siteClock(null, () => 1234).now_ms()).toBe(1234)
  })

  test('keeps its time when its speed changes, and never runs back', () => {
    let wall = 1000
    const clock = siteClock({ wall_ms: 1000, site_ms: 500_000, speed: 60 }, () => wall)
    wall = 2000
    expect(clock.now_ms()).toBe(560_000)
    clock.setSpeed(1)
    expect(clock.now_ms()).toBe(560_000)
    wall = 3000
    expect(clock.now_ms()).toBe(561_000)
    expect(siteTime_ms(atSpeed({ wall_ms: 0, site_ms: 0, speed: 300 }, 10, 1), 10)).toBe(3000)
  })
})

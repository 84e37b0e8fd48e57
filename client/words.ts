import screen from '../config/words/en/screen.json' with { type: 'json' }
import { sayIn } from '../config/words/say.js'

/** Every sentence on the screen. */
export const say = sayIn('en', screen)

const words: Readonly<Record<string, string>> = screen

/** A word for a key that another room chose; the key itself where the catalogue has none for it. */
export const wordFor = (key: string): string => (key in words ? say(key) : key)

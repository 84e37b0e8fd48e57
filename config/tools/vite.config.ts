import { fileURLToPath } from 'node:url'
import { defineConfig } from 'vite'

const here = (path: string) => fileURLToPath(new URL(path, import.meta.url))

/**
 * The client, built into dist/client. Served under a policy that allows no inline script or style:
 * nothing is inlined, and no polyfill script is injected.
 */
export default defineConfig({
  root: here('../../client'),
  publicDir: here('../../client/public'),
  oxc: { jsx: { runtime: 'automatic', importSource: 'preact' } },
  build: {
    outDir: here('../../dist/client'),
    emptyOutDir: true,
    assetsInlineLimit: 0,
    modulePreload: { polyfill: false },
    sourcemap: true,
    target: 'es2022',
  },
})

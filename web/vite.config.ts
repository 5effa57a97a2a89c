import { fileURLToPath } from 'node:url'
import { defineConfig } from 'vite'

/** Where the development server finds the API; the built page is served by the program itself. */
const api = process.env.LEAKTIDE_API ?? 'http://127.0.0.1:7250'

export default defineConfig(({ command }) => {
  // The page is always built as it is served: a build that the tests start would otherwise take their NODE_ENV.
  if (command === 'build') process.env.NODE_ENV = 'production'
  return {
    root: fileURLToPath(new URL('.', import.meta.url)),
    oxc: { jsx: { runtime: 'automatic', importSource: 'preact' } },
    build: { outDir: '../dist/web', emptyOutDir: true, target: 'es2022', assetsInlineLimit: 0, modulePreload: false },
    server: { proxy: { '/api': api } },
  }
})

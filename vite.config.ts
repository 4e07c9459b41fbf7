import { fileURLToPath } from 'node:url'
import vue from '@vitejs/plugin-vue'
import type { Plugin } from 'vite'
import { defineConfig } from 'vitest/config'

const apiPort = process.env.FANLIGHT_API_PORT ?? '3000'

const fileOf = (path: string) => fileURLToPath(new URL(path, import.meta.url))

/** ml-matrix's entry is one CommonJS file: from its source only what a fit needs is shipped. Nobody reads what debug would log. */
const slimPackages: Plugin = {
  name: 'slim-packages',
  apply: 'build',
  config: () => ({ resolve: { alias: { 'ml-matrix': fileOf('./node_modules/ml-matrix/src/index.js'), debug: fileOf('./src/workers/silent-debug.cjs') } } }),
}

export default defineConfig({
  plugins: [vue(), slimPackages],
  resolve: { alias: { '@': fileOf('./src') } },
  // Licence notices stand once, in dist/licenses.md, instead of before each of hundreds of modules.
  worker: { format: 'es', rolldownOptions: { output: { comments: { legal: false } } } },
  build: { target: 'es2022', manifest: true, license: { fileName: 'licenses.md' }, rolldownOptions: { output: { comments: { legal: false } } } },
  server: { proxy: { '/api': { target: `http://127.0.0.1:${apiPort}` } } },
  test: {
    projects: [
      {
        extends: true,
        test: { name: 'unit', include: ['tests/unit/**/*.test.ts'], exclude: ['tests/unit/src/**'] },
      },
      {
        extends: true,
        test: { name: 'client', environment: 'jsdom', include: ['tests/unit/src/**/*.test.ts'] },
      },
      { extends: true, test: { name: 'reference', include: ['tests/reference/**/*.test.ts'] } },
      {
        extends: true,
        test: { name: 'simulation', include: ['tests/simulation/**/*.test.ts'], testTimeout: 120_000 },
      },
      {
        extends: true,
        test: {
          name: 'api',
          include: ['tests/api/**/*.test.ts'],
          testTimeout: 60_000,
          hookTimeout: 60_000,
        },
      },
      {
        extends: true,
        test: {
          name: 'browser',
          include: ['tests/browser/**/*.test.ts'],
          testTimeout: 180_000,
          hookTimeout: 180_000,
          fileParallelism: false,
        },
      },
    ],
  },
})

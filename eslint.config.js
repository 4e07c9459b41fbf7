import js from '@eslint/js'
import { createTypeScriptImportResolver } from 'eslint-import-resolver-typescript'
import { importX } from 'eslint-plugin-import-x'
import vue from 'eslint-plugin-vue'
import { defineConfig } from 'eslint/config'
import globals from 'globals'
import { existsSync, readdirSync } from 'node:fs'
import tseslint from 'typescript-eslint'

const root = import.meta.dirname

/** One zone per feature folder, read from disk, so that a new feature is sealed the day it is born. */
function sealedFeatures(folder) {
  if (!existsSync(`${root}/${folder}`)) return []
  return readdirSync(`${root}/${folder}`, { withFileTypes: true })
    .filter(entry => entry.isDirectory() && !['base', 'charts'].includes(entry.name))
    .map(entry => ({
      target: `./${folder}/${entry.name}`,
      from: `./${folder}`,
      except: [`./${entry.name}`, './base', './charts'],
      message: 'A feature never reaches into another: compose them one level up, or move the common part to shared/.',
    }))
}

/** Every folder of shared/ has one door. */
const doors = existsSync(`${root}/shared`)
  ? readdirSync(`${root}/shared`, { withFileTypes: true })
      .filter(entry => entry.isDirectory() && entry.name !== 'contracts')
      .map(entry => ({
        target: ['./src', './server', './db'],
        from: `./shared/${entry.name}`,
        except: ['./index.ts'],
        message: `Use the door: #shared/${entry.name}/index.ts.`,
      }))
  : []

const zones = [
  { target: './shared', from: ['./src', './server', './db', './tests'], message: 'shared/ imports nothing of the app.' },
  { target: './shared/stats', from: ['./shared'], except: ['./stats'], message: 'shared/stats stands on itself alone.' },
  { target: './db', from: ['./src', './server', './tests'], message: 'db/ is a leaf.' },
  { target: './src', from: ['./server', './db', './tests'], message: 'The client knows the server through shared/contracts only.' },
  { target: './server', from: ['./src', './tests'], message: 'The server never imports client code or test helpers.' },
  { target: './src/components', from: './src/views', message: 'Views compose components, never the reverse.' },
  { target: './src/components', from: './src/router', except: ['./route-names.ts'], message: 'Components link by the names in router/route-names.ts.' },
  { target: './server/services', from: './server/routes', message: 'Rules know nothing of HTTP.' },
  { target: './server/repositories', from: ['./server/services', './server/routes'], message: 'SQL knows no rules.' },
  ...doors,
  ...sealedFeatures('src/components'),
]

const pure = 'shared/ is pure: take the clock or the random source as an argument.'
const noDatabase = { group: ['**/db/**', '#db/**', 'drizzle-orm', 'drizzle-orm/*', 'pg'], message: 'Only repositories touch the database.' }
const noHttp = { group: ['express'], message: 'Services and repositories know nothing of HTTP.' }

export default defineConfig(
  { ignores: ['dist/**', 'db/migrations/**', 'coverage/**', '.artifacts/**'] },
  js.configs.recommended,
  tseslint.configs.recommended,
  vue.configs['flat/recommended'],
  {
    files: ['**/*.{ts,vue}'],
    plugins: { 'import-x': importX },
    languageOptions: { parserOptions: { parser: tseslint.parser, extraFileExtensions: ['.vue'] } },
    settings: {
      'import-x/resolver-next': [createTypeScriptImportResolver({ project: './tsconfig.json' })],
      'import-x/extensions': ['.ts', '.vue'],
      'import-x/parsers': { '@typescript-eslint/parser': ['.ts'], 'vue-eslint-parser': ['.vue'] },
    },
    rules: {
      'import-x/no-restricted-paths': ['error', { basePath: root, zones }],
      'import-x/no-cycle': 'error',
      'import-x/no-unresolved': ['error', { ignore: ['^virtual:'] }],
      '@typescript-eslint/consistent-type-imports': 'error',
      '@typescript-eslint/no-explicit-any': 'error',
      // A leading underscore says on purpose: left out of the rest, or there for the types alone.
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }],
      '@typescript-eslint/no-non-null-assertion': 'error',
      '@typescript-eslint/ban-ts-comment': ['error', { minimumDescriptionLength: 10 }],
      'max-lines': ['error', { max: 300, skipBlankLines: true, skipComments: true }],
      'no-console': 'error',
      eqeqeq: 'error',
    },
  },
  {
    files: ['src/**/*.vue'],
    rules: {
      'vue/block-order': ['error', { order: ['script', 'template', 'style'] }],
      'vue/block-lang': ['error', { script: { lang: 'ts' } }],
      'vue/component-api-style': ['error', ['script-setup']],
      'vue/define-macros-order': ['error', { order: ['defineProps', 'defineEmits', 'defineModel', 'defineSlots'] }],
      'vue/define-props-declaration': ['error', 'type-based'],
      // An optional prop that is not given is undefined, and its type says so.
      'vue/require-default-prop': 'off',
      'vue/max-attributes-per-line': 'off',
      'vue/singleline-html-element-content-newline': 'off',
      'vue/html-self-closing': 'off',
      'vue/html-closing-bracket-newline': 'off',
      'vue/html-indent': 'off',
      'vue/multiline-html-element-content-newline': 'off',
      'max-lines': ['error', { max: 200, skipBlankLines: true, skipComments: true }],
    },
  },
  { files: ['src/**/*.{ts,vue}'], languageOptions: { globals: { ...globals.browser, ...globals.worker } } },
  { files: ['server/**/*.ts', 'db/**/*.{ts,mjs}', 'tests/**/*.{ts,mjs}', 'scripts/**/*.mjs', '*.{ts,js}'], languageOptions: { globals: globals.node } },
  { files: ['**/*.cjs'], languageOptions: { sourceType: 'commonjs', globals: globals.node } },
  {
    files: ['shared/**/*.ts'],
    rules: {
      'no-restricted-globals': ['error', 'window', 'document', 'process', 'fetch', 'localStorage', 'setTimeout'],
      'no-restricted-properties': ['error',
        { object: 'Math', property: 'random', message: pure },
        { object: 'Date', property: 'now', message: pure }],
      'no-restricted-syntax': ['error', { selector: 'NewExpression[callee.name="Date"][arguments.length=0]', message: pure }],
      'no-restricted-imports': ['error', {
        patterns: [{
          regex: '^(?!\\.{1,2}/|#shared/|zod$|@stdlib/|ml-matrix$|ml-levenberg-marquardt$|simple-statistics$)',
          message: 'shared/ depends on zod, the chosen numeric libraries and itself.',
        }],
      }],
    },
  },
  // Flat config: for one file the LAST no-restricted-imports wins whole; it is not merged. One block per kind of file.
  { files: ['server/services/**/*.ts'], rules: { 'no-restricted-imports': ['error', { patterns: [noDatabase, noHttp] }] } },
  { files: ['server/routes/**/*.ts'], rules: { 'no-restricted-imports': ['error', { patterns: [noDatabase, { group: ['**/repositories/**'], message: 'Routes call the service.' }] }] } },
  { files: ['server/repositories/**/*.ts'], rules: { 'no-restricted-imports': ['error', { patterns: [noHttp] }] } },
)

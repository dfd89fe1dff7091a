/** Lint rules: strict type-checked, and the purity of the numerical rooms. Layers and cycles are checked by `npm run layers`. */
import { fileURLToPath } from 'node:url';
import eslint from '@eslint/js';
import { defineConfig } from 'eslint/config';
import tseslint from 'typescript-eslint';

const CODE = ['src/**/*.ts', 'workers/**/*.ts', 'tests/**/*.ts'];
/** Rooms of pure functions; in sweep/ only the reading of the file touches the machine. */
const PURE = ['src/{linalg,models,spectral,schedules,statistics,sweep,analysis}/**/*.ts'];
const IMPURE = ['src/sweep/read-file.ts'];

const purity = {
  'no-restricted-imports': [
    'error',
    {
      patterns: [
        {
          regex: '^(node:|(fs|os|path|crypto|process|worker_threads|child_process)(/|$))',
          message: 'this room does no I/O and runs in a browser',
        },
      ],
    },
  ],
  'no-restricted-globals': ['error', 'process', 'Buffer', 'performance', 'console', 'fetch', 'setTimeout', 'setInterval', 'setImmediate'],
  'no-restricted-properties': [
    'error',
    { object: 'Math', property: 'random', message: 'draw from the stream that is handed in (core/random.ts)' },
    { object: 'Date', property: 'now', message: 'this room reads no clock' },
  ],
};

export default defineConfig(
  { ignores: ['dist/', 'out/', 'coverage/', '.cache/', '.windrow/', '**/assembly/'] },
  eslint.configs.recommended,
  {
    files: CODE,
    extends: [tseslint.configs.strictTypeChecked],
    languageOptions: { parserOptions: { project: './tests/tsconfig.json', tsconfigRootDir: fileURLToPath(new URL('.', import.meta.url)) } },
    rules: {
      'max-lines': ['error', { max: 400 }],
      'no-restricted-exports': [
        'error',
        { restrictDefaultExports: { direct: true, named: true, defaultFrom: true, namedFrom: true, namespaceFrom: true } },
      ],
      '@typescript-eslint/consistent-type-imports': 'error',
      '@typescript-eslint/no-floating-promises': 'error',
      '@typescript-eslint/switch-exhaustiveness-check': 'error',
      // Numbers read well in messages; objects do not.
      '@typescript-eslint/restrict-template-expressions': ['error', { allowNumber: true, allowBoolean: true }],
      // Typed arrays and checked indices: the kernels index in range by construction, and say so with `!`.
      '@typescript-eslint/no-non-null-assertion': 'off',
      // With noUncheckedIndexedAccess off an indexed value never looks absent, though a map or a parsed record can lack it.
      '@typescript-eslint/no-unnecessary-condition': 'off',
      '@typescript-eslint/no-confusing-void-expression': ['error', { ignoreArrowShorthand: true, ignoreVoidReturningFunctions: true }],
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }],
    },
  },
  { files: PURE, ignores: IMPURE, rules: purity },
  {
    files: ['tests/**/*.ts'],
    rules: {
      'max-lines': ['error', { max: 600 }],
      '@typescript-eslint/no-unsafe-assignment': 'off',
      '@typescript-eslint/no-unsafe-member-access': 'off',
      '@typescript-eslint/no-unsafe-argument': 'off',
      '@typescript-eslint/no-unsafe-call': 'off',
      '@typescript-eslint/no-unsafe-return': 'off',
      '@typescript-eslint/require-await': 'off',
    },
  },
  { files: ['tests/vitest.config.ts'], rules: { 'no-restricted-exports': 'off' } },
  {
    files: ['**/*.mjs', '**/*.cjs'],
    languageOptions: {
      globals: {
        process: 'readonly',
        console: 'readonly',
        setTimeout: 'readonly',
        URL: 'readonly',
        module: 'writable',
        Buffer: 'readonly',
      },
    },
    rules: { 'max-lines': ['error', { max: 400 }] },
  },
);

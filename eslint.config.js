// Which habits does the linter hold? The recommended sets, with a reason beside each exception.

import js from '@eslint/js';
import { defineConfig } from 'eslint/config';
import tseslint from 'typescript-eslint';

const typed = ['src/**/*.ts', 'cli/**/*.ts', 'viewer/**/*.ts', 'test/**/*.ts', '*.config.ts'];

export default defineConfig(
  {
    // Made by tools; and AssemblyScript, which shares TypeScript's letters but not its types.
    ignores: ['dist/', 'runs/', 'coverage/', 'src/sparse/kernels/wasm/'],
  },
  js.configs.recommended,
  tseslint.configs.recommended,
  {
    files: typed,
    extends: [tseslint.configs.recommendedTypeChecked],
    languageOptions: { parserOptions: { projectService: true, tsconfigRootDir: import.meta.dirname } },
    rules: {
      // A leading underscore says "given, not needed": an interface may hand over more than one caller uses.
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }],
      // Inner loops index arrays by arithmetic (x0 = points[2 * i]); an iterator there costs time and says less.
      '@typescript-eslint/prefer-for-of': 'off',
      // A method may be async because its interface is, although this one has nothing to wait for.
      '@typescript-eslint/require-await': 'off',
    },
  },
  {
    files: ['test/**/*.ts'],
    rules: {
      // Tests read JSON printed by the program and compare it as it comes; typing it twice would test the types only.
      '@typescript-eslint/no-unsafe-assignment': 'off',
      '@typescript-eslint/no-unsafe-member-access': 'off',
      '@typescript-eslint/no-unsafe-argument': 'off',
      '@typescript-eslint/no-unsafe-call': 'off',
      '@typescript-eslint/no-unsafe-return': 'off',
    },
  },
  {
    // Plain scripts run by Node.
    files: ['*.js', '*.mjs', '**/*.mjs'],
    languageOptions: { globals: { process: 'readonly', console: 'readonly', URL: 'readonly' } },
  },
);

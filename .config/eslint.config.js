import js from '@eslint/js'
import svelte from 'eslint-plugin-svelte'
import globals from 'globals'
import ts from 'typescript-eslint'

export default ts.config(
  { ignores: ['dist/**', 'node_modules/**', 'test/**/*.py'] },
  js.configs.recommended,
  ...ts.configs.strictTypeChecked,
  ...svelte.configs.recommended,
  {
    languageOptions: {
      globals: { ...globals.browser, ...globals.worker, ...globals.node },
      parserOptions: {
        projectService: { allowDefaultProject: ['.config/eslint.config.js'] },
        tsconfigRootDir: new URL('..', import.meta.url).pathname,
        extraFileExtensions: ['.svelte'],
      },
    },
    rules: {
      // Indices into typed columns are numbers by construction; the rule would ask for String() in every message.
      '@typescript-eslint/restrict-template-expressions': ['error', { allowNumber: true, allowBoolean: true }],
      // `!` marks an element that the loop bounds guarantee; a guard there would be a branch no test can reach.
      '@typescript-eslint/no-non-null-assertion': 'off',
      '@typescript-eslint/no-confusing-void-expression': ['error', { ignoreArrowShorthand: true }],
      '@typescript-eslint/no-unnecessary-condition': ['error', { allowConstantLoopConditions: true }],
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }],
    },
  },
  {
    files: ['**/*.svelte', '**/*.svelte.ts'],
    languageOptions: { parserOptions: { parser: ts.parser } },
    rules: {
      'no-undef': 'off',
      // svelte-check types the props and callbacks of components; to the linter alone they are `any`.
      '@typescript-eslint/no-unsafe-argument': 'off',
      '@typescript-eslint/no-unsafe-assignment': 'off',
      '@typescript-eslint/no-unsafe-call': 'off',
      '@typescript-eslint/no-unsafe-member-access': 'off',
      // Maps and sets in state are replaced, never changed in place ($state.raw).
      'svelte/prefer-svelte-reactivity': 'off',
    },
  },
  { files: ['.config/**/*.js'], ...ts.configs.disableTypeChecked },
)

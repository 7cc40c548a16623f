import vue from 'eslint-plugin-vue';
import tseslint from 'typescript-eslint';

/**
 * Who may import whom. The floors of the house (see DEVELOPERS.md): shared knows nobody, the client
 * knows shared, server and worker know shared and meet only in the database. An arrow in the wrong
 * direction is an error here, not advice.
 */
const forbid = (...patterns) => ({
  'no-restricted-imports': ['error', { patterns: patterns.map(([group, message]) => ({ group, message })) }],
});
const fromOutsideShared = [['**/src/**', '**/server/**', '**/worker/**'], 'shared imports none of its users'];
const fromNode = [
  ['node:*', 'fs', 'path', 'pg', 'typeorm', 'express', 'vue'],
  'shared/stats and shared/radio are pure',
];

const fromOutsideWorker = [
  ['**/src/**', '**/server/features/**', '**/server/middleware/**', '**/server/app.ts'],
  'the worker shares only database and platform with the server',
];

export default tseslint.config(
  { ignores: ['dist/**', 'node_modules/**', '.data/**', 'coverage/**', 'public/**'] },
  ...tseslint.configs.strict,
  ...vue.configs['flat/recommended'],
  {
    files: ['**/*.vue'],
    languageOptions: { parserOptions: { parser: tseslint.parser } },
    rules: {
      'vue/block-order': ['error', { order: ['script', 'template', 'style'] }],
      'vue/define-props-declaration': ['error', 'type-based'],
      'vue/define-emits-declaration': ['error', 'type-based'],
      'vue/component-api-style': ['error', ['script-setup']],
      // Prettier decides where lines break.
      'vue/max-attributes-per-line': 'off',
      'vue/singleline-html-element-content-newline': 'off',
      'vue/multiline-html-element-content-newline': 'off',
      'vue/html-self-closing': 'off',
      'vue/html-indent': 'off',
      'vue/html-closing-bracket-newline': 'off',
      'vue/first-attribute-linebreak': 'off',
    },
  },
  {
    rules: {
      '@typescript-eslint/consistent-type-imports': 'error',
      '@typescript-eslint/no-explicit-any': 'error',
      '@typescript-eslint/no-non-null-assertion': 'off',
      '@typescript-eslint/no-extraneous-class': 'off',
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_' }],
      'no-console': 'error',
      eqeqeq: ['error', 'always', { null: 'ignore' }],
    },
  },
  { files: ['server/launch/**', 'tests/**', 'eslint.config.js'], rules: { 'no-console': 'off' } },
  {
    files: ['**/*.mjs', '**/*.js'],
    languageOptions: {
      globals: {
        process: 'readonly',
        console: 'readonly',
        URL: 'readonly',
        setTimeout: 'readonly',
        clearTimeout: 'readonly',
        Buffer: 'readonly',
      },
    },
  },
  { files: ['shared/**/*.ts'], rules: forbid(fromOutsideShared) },
  {
    files: ['shared/stats/**/*.ts', 'shared/radio/**/*.ts', 'shared/pairing/**/*.ts'],
    ignores: ['**/*.test.ts'],
    rules: {
      ...forbid(fromOutsideShared, fromNode),
      'no-restricted-properties': [
        'error',
        { object: 'Math', property: 'random', message: 'pass a seeded generator in' },
        { object: 'Date', property: 'now', message: 'pass the time in' },
      ],
      'no-restricted-globals': ['error', 'window', 'document', 'process', 'performance'],
    },
  },
  {
    files: ['src/**/*.{ts,vue}'],
    ignores: ['**/*.test.ts'],
    rules: forbid([
      ['**/server/**', '**/worker/**', 'node:*'],
      'the client talks to the server over HTTP only',
    ]),
  },
  {
    files: ['src/components/**/*.{ts,vue}'],
    ignores: ['**/*.test.ts'],
    rules: forbid(
      [['**/server/**', '**/worker/**', 'node:*'], 'the client talks to the server over HTTP only'],
      [
        ['**/src/api/**', '@/api/**', '../../api/**', '../api/**', '**/stores/**'],
        'components get props and emit events; views and stores talk to the API',
      ],
    ),
  },
  {
    files: ['server/**/*.ts'],
    ignores: ['**/*.test.ts'],
    rules: forbid([['**/src/**', '**/worker/**'], 'server and worker meet only in PostgreSQL']),
  },
  {
    files: ['server/features/**/*.ts'],
    ignores: ['**/*.test.ts'],
    rules: forbid(
      [['**/src/**', '**/worker/**'], 'server and worker meet only in PostgreSQL'],
      [
        ['../*/*.repository.ts', '../*/*.service.ts'],
        "a feature may import another feature's read model only",
      ],
    ),
  },
  {
    files: ['worker/**/*.ts'],
    ignores: ['**/*.test.ts'],
    rules: forbid(fromOutsideWorker, [
      ['**/truth.ts', '**/hidden-values.ts'],
      'what the simulator knows of its antennas and receivers is for tests only',
    ]),
  },
  {
    // The simulator itself and the tests' window on it hold the values that all others must not see.
    files: ['worker/fake-feed/simulator.ts', 'worker/fake-feed/truth.ts'],
    rules: forbid(fromOutsideWorker),
  },
);

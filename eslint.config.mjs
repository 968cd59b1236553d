import js from '@eslint/js';
import globals from 'globals';
import svelte from 'eslint-plugin-svelte';
import ts from 'typescript-eslint';

/** The rooms of the engine from the lowest to the highest: a room imports from itself and from rooms before it. */
const ROOMS = ['numerics', 'study', 'events', 'tally', 'posterior', 'audit', 'ensemble', 'handover'];
const NODE_BUILT_IN = '^node:';

const restrict = (files, patterns) => ({
  files,
  rules: { 'no-restricted-imports': ['error', { patterns }] },
});

const ABOVE_ENGINE = { regex: '(^|/)(main|renderer)/', message: 'Imports run one way: renderer -> main -> src.' };

const oneWay = ROOMS.map((room, index) => {
  const above = ROOMS.slice(index + 1);
  const patterns = [ABOVE_ENGINE, { regex: '^(electron|svelte|d3)', message: 'The engine knows no window.' }];
  if (above.length > 0) {
    patterns.push({ regex: `(^|/)(${above.join('|')})/`, message: `src/${room} stands below these rooms.` });
  }
  return restrict([`src/${room}/**/*.ts`], patterns);
});

export default ts.config(
  { ignores: ['out/', 'dist/', 'node_modules/', 'screens/', 'resources/loaders/', '**/*.as.ts'] },
  js.configs.recommended,
  ...ts.configs.recommended,
  ...svelte.configs.recommended,
  { languageOptions: { globals: { ...globals.node, ...globals.browser } } },
  {
    files: ['**/*.svelte', '**/*.svelte.ts'],
    languageOptions: {
      parserOptions: { parser: ts.parser, projectService: true, extraFileExtensions: ['.svelte'] },
    },
  },
  {
    rules: {
      '@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }],
      'prefer-const': ['error', { destructuring: 'all' }],
      'no-loss-of-precision': 'off',
    },
  },
  ...oneWay,
  restrict(['main/**/*.ts'], [{ regex: '(^|/)renderer/', message: 'Imports run one way: renderer -> main -> src.' }]),
  restrict(
    ['renderer/**/*.ts', 'renderer/**/*.svelte'],
    [{ regex: NODE_BUILT_IN, message: 'The window knows nothing of Node.' }],
  ),
  // Tests take documents apart and put wrong things into them: what they handle has no type.
  { files: ['tests/**/*.ts'], rules: { '@typescript-eslint/no-explicit-any': 'off' } },
  { files: ['src/**/*.ts'], rules: { 'no-restricted-properties': ['error', { object: 'Math', property: 'random' }] } },
);

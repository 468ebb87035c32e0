import js from '@eslint/js';
import svelte from 'eslint-plugin-svelte';
import globals from 'globals';
import ts from 'typescript-eslint';
import svelteConfig from './svelte.config.js';

/** Layers import downwards only: domain ← contracts ← server, state, components ← routes. */
const ban = (names, message) => ({
	'no-restricted-imports': ['error', { patterns: [{ group: names, message }] }]
});
const OUTSIDE_PURE = [
	'node:*',
	'svelte',
	'svelte/*',
	'@sveltejs/*',
	'kysely',
	'better-sqlite3',
	'$app/*',
	'$env/*',
	'mqtt',
	'aedes'
];
const above = (...layers) => layers.flatMap((layer) => [`$lib/${layer}`, `$lib/${layer}/*`, `**/lib/${layer}/*`]);

export default ts.config(
	{ ignores: ['build/', '.svelte-kit/', 'data/', 'node_modules/', 'test-results/', 'coverage/'] },
	js.configs.recommended,
	...ts.configs.recommended,
	...svelte.configs['flat/recommended'],
	{
		languageOptions: { globals: { ...globals.browser, ...globals.node } },
		rules: {
			'no-undef': 'off',
			'@typescript-eslint/no-unused-vars': ['error', { argsIgnorePattern: '^_', varsIgnorePattern: '^_' }],
			'svelte/no-navigation-without-resolve': 'off'
		}
	},
	{
		files: ['**/*.svelte', '**/*.svelte.ts'],
		languageOptions: {
			parserOptions: { projectService: false, extraFileExtensions: ['.svelte'], parser: ts.parser, svelteConfig }
		}
	},
	{
		files: ['src/lib/domain/**/*.ts'],
		ignores: ['**/*.test.ts'],
		rules: {
			...ban(
				[...OUTSIDE_PURE, ...above('contracts', 'server', 'state', 'components')],
				'The domain is pure: no I/O, no framework, nothing above it.'
			),
			'no-restricted-globals': ['error', 'process', 'setTimeout', 'setInterval', 'performance', 'fetch'],
			'no-restricted-syntax': [
				'error',
				{ selector: "MemberExpression[object.name='Date'][property.name='now']", message: 'Pass the clock in.' },
				{ selector: "MemberExpression[object.name='Math'][property.name='random']", message: 'Pass randomness in.' }
			]
		}
	},
	{
		files: ['src/lib/contracts/**/*.ts'],
		ignores: ['**/*.test.ts'],
		rules: ban([...OUTSIDE_PURE, ...above('server', 'state', 'components')], 'Contracts know the domain only.')
	},
	{
		files: ['src/lib/state/**/*.ts', 'src/lib/components/**/*.{ts,svelte}'],
		rules: ban([...above('server'), 'node:*', 'kysely', 'better-sqlite3'], 'Browser code cannot reach the server.')
	},
	{
		files: ['simulators/**/*.ts'],
		rules: ban([...above('state', 'components')], 'Simulators use the domain and the contracts.')
	}
);

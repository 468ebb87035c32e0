import { sveltekit } from '@sveltejs/kit/vite';
import tailwindcss from '@tailwindcss/vite';
import { fileURLToPath } from 'node:url';
import { defineConfig } from 'vitest/config';

const LIB = fileURLToPath(new URL('./src/lib', import.meta.url));
const alias = { $lib: LIB };

/** Worker threads are plain Node programs beside the web server, so they are built apart from it. */
const threads = defineConfig({
	resolve: { alias },
	ssr: { target: 'node', noExternal: [] },
	build: {
		ssr: true,
		outDir: 'build/threads',
		emptyOutDir: true,
		target: 'node20',
		rollupOptions: {
			input: { broker: `${LIB}/server/threads/broker.ts`, engine: `${LIB}/server/threads/engine.ts` },
			output: { format: 'es', entryFileNames: '[name].js', chunkFileNames: 'chunk-[hash].js' }
		}
	}
});

const web = defineConfig({
	plugins: [tailwindcss(), sveltekit()],
	test: {
		expect: { requireAssertions: true },
		projects: [
			{
				extends: true,
				test: {
					name: 'unit',
					include: ['src/**/*.test.ts', 'simulators/**/*.test.ts', 'migrations/**/*.test.ts'],
					environment: 'node'
				}
			},
			{
				extends: true,
				test: {
					name: 'integration',
					include: ['tests/integration/**/*.test.ts'],
					environment: 'node',
					testTimeout: 60_000,
					hookTimeout: 60_000,
					pool: 'forks',
					fileParallelism: false
				}
			}
		]
	}
});

export default defineConfig(({ mode }) => (mode === 'threads' ? threads : web));

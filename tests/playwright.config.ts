import { defineConfig } from '@playwright/test';
import { existsSync } from 'node:fs';

const SYSTEM_BROWSERS = ['/usr/bin/chromium', '/usr/bin/chromium-browser', '/usr/bin/google-chrome'];
/** The system's browser when there is one; otherwise Playwright looks for its own and says how to install it. */
const executablePath = [process.env['CHROMIUM_PATH'], ...SYSTEM_BROWSERS].find((path) => path && existsSync(path));

export default defineConfig({
	testDir: './e2e',
	outputDir: '../test-results',
	fullyParallel: false,
	workers: 1,
	forbidOnly: true,
	timeout: 120_000,
	expect: { timeout: 20_000 },
	use: {
		viewport: { width: 1440, height: 900 },
		launchOptions: {
			...(executablePath ? { executablePath } : {}),
			args: [
				'--no-sandbox',
				'--disable-gpu',
				'--disable-quic',
				'--no-first-run',
				'--disable-background-networking',
				'--disable-component-update',
				'--disable-sync',
				'--use-gl=angle',
				'--use-angle=swiftshader',
				'--enable-unsafe-swiftshader'
			]
		},
		trace: 'retain-on-failure'
	}
});

import { expect, test, type Page } from '@playwright/test';
import { startFleet, type RunningFleet } from '../../simulators/mqtt-fleet.ts';
import { startDesk, type Desk } from '../support/desk.ts';

/** The Floor page as its users meet it: plan, table, keyboard, phone. */

let desk: Desk;
let fleet: RunningFleet;

test.beforeAll(async () => {
	desk = await startDesk();
	fleet = startFleet({
		scenario: 'quiet-morning',
		robots: 6,
		seed: 3,
		url: desk.mqttUrl,
		credentials: desk.credentials
	});
	await fleet.ready;
});

test.afterAll(async () => {
	await fleet?.stop();
	await desk?.stop();
});

async function signIn(page: Page, role = 'operator'): Promise<void> {
	await page.goto(`${desk.url}/sign-in`);
	await page.getByLabel(/mail/i).fill(`${role}@example.org`);
	await page.getByLabel(/password/i).fill(desk.password);
	await page.getByRole('button', { name: /sign in/i }).click();
	await page.waitForURL(/\/floors\//);
	await expect(page.locator('[data-freshness=live]')).toBeVisible();
}

const robotTable = (page: Page) => page.getByRole('table', { name: 'Robots' });

test('the table says in words what the plan draws, and selecting there selects everywhere', async ({ page }) => {
	await signIn(page);
	await page.getByRole('button', { name: 'Plan and table' }).click();
	const rows = robotTable(page).locator('tbody tr');
	await expect(rows.first()).toBeVisible();
	await expect(robotTable(page)).toContainText(/working|idle|waiting|charging/);

	const select = rows.first().getByRole('button');
	const mark = await select.innerText();
	await select.click();
	await expect(page).toHaveURL(/select=robot:/);
	await expect(page.getByRole('article', { name: new RegExp(`^Robot ${mark}`) })).toBeVisible();
	await expect(select).toHaveAttribute('aria-pressed', 'true');

	await page.reload();
	await expect(page.getByRole('article', { name: new RegExp(`^Robot ${mark}`) })).toBeVisible();
});

test('a table sorts by any column and says which', async ({ page }) => {
	await signIn(page);
	await page.getByRole('button', { name: 'Table', exact: true }).click();
	const battery = robotTable(page).getByRole('columnheader', { name: /^Battery/ });
	await battery.getByRole('button').click();
	await expect(battery).toHaveAttribute('aria-sort', 'ascending');
	await battery.getByRole('button').click();
	await expect(battery).toHaveAttribute('aria-sort', 'descending');
});

test('the plan is worked by keys alone', async ({ page }) => {
	await signIn(page);
	const plan = page.getByRole('application', { name: /^Plan of/ });
	await page.getByRole('button', { name: 'Table', exact: true }).focus();
	await page.keyboard.press('Tab');
	await expect(plan).toBeFocused();
	await expect(page.getByText(/Arrow keys move the plan/)).toBeVisible();
	const scale = page.getByText(/^\d+(\.\d+)? m$/).first();
	const before = await scale.innerText();
	for (let i = 0; i < 6; i++) await page.keyboard.press('+');
	await expect(scale).not.toHaveText(before);
	await page.keyboard.press('Home');
	await expect(scale).toHaveText(before);
	await page.keyboard.press('PageDown');
	await expect(page.getByRole('article', { name: /^Robot/ })).toBeVisible();
	await page.keyboard.press('Escape');
	await expect(page.getByRole('article', { name: /^Robot/ })).toHaveCount(0);
});

test('a lost connection is named with the time last seen, and comes back by itself', async ({ page }) => {
	await signIn(page);
	const again = desk.restart();
	await expect(page.locator('[data-freshness=none]')).toContainText(/no connection, last seen \d\d:\d\d:\d\d/);
	await again;
	await expect(page.locator('[data-freshness=live]')).toBeVisible({ timeout: 60_000 });
});

test('a wall screen reads and has nothing to press', async ({ page }) => {
	await signIn(page, 'display');
	await expect(page.getByRole('button', { name: /^Acknowledge/ })).toHaveCount(0);
});

test('on a phone nothing is wider than the screen, and the alarms open from below', async ({ page }) => {
	await page.setViewportSize({ width: 390, height: 844 });
	await signIn(page);
	expect(await page.evaluate(() => document.documentElement.scrollWidth)).toBeLessThanOrEqual(390);
	await page.getByRole('button', { name: /alarms?.*More/i }).click();
	await expect(page.getByRole('region', { name: 'Alarms' })).toBeVisible();
});

test('no part of the page offends the content security policy or writes an error', async ({ page }) => {
	const said: string[] = [];
	page.on('console', (message) => {
		if (message.type() === 'error') said.push(message.text());
	});
	page.on('pageerror', (error) => said.push(error.message));
	await signIn(page);
	for (const place of ['Alarms', 'Incidents', 'Health', 'Floor']) {
		await page.getByRole('navigation', { name: 'Pages' }).getByRole('link', { name: place }).click();
		await expect(page.getByRole('heading', { level: 1 })).toBeAttached();
	}
	await page.emulateMedia({ colorScheme: 'dark' });
	expect(said).toEqual([]);
});

test('a filter of incidents lives in the address', async ({ page }) => {
	await signIn(page);
	await page.goto(`${desk.url}/incidents`);
	await page.getByLabel('Verdict').selectOption('packed');
	await expect(page).toHaveURL(/verdict=packed/);
	const verdicts = page.locator('tbody tr td:nth-child(4)');
	await expect(verdicts.first()).toHaveText('packed');
	await page.reload();
	await expect(page.getByLabel('Verdict')).toHaveValue('packed');
	expect(new Set(await verdicts.allInnerTexts())).toEqual(new Set(['packed']));
});

test('a token made on the account page opens the interface, and no longer once withdrawn', async ({
	page,
	request
}) => {
	await signIn(page);
	await page.goto(`${desk.url}/account`);
	await page.getByLabel('What for').fill('wall clock');
	await page.getByRole('button', { name: 'Make a token' }).click();
	const token = await page.getByText(/^elbowroom_/).innerText();
	const robots = () =>
		request
			.get(`${desk.url}/api/v1/robots`, { headers: { authorization: `Bearer ${token}` } })
			.then((answer) => answer.status());
	expect(await robots()).toBe(200);
	await page.getByRole('button', { name: 'Withdraw wall clock' }).click();
	await expect(page.getByText('You have none.')).toBeVisible();
	expect(await robots()).toBe(401);
});

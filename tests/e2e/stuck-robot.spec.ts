import { expect, test, type Page } from '@playwright/test';
import { startFleet, type RunningFleet } from '../../simulators/mqtt-fleet.ts';
import { startDesk, type Desk } from '../support/desk.ts';

let desk: Desk;
let fleet: RunningFleet | undefined;

test.beforeAll(async () => {
	desk = await startDesk();
});

test.afterEach(async () => {
	await fleet?.stop();
	fleet = undefined;
});

test.afterAll(async () => {
	await desk?.stop();
});

async function signIn(page: Page, role: string): Promise<void> {
	await page.goto(`${desk.url}/sign-in`);
	await page.getByLabel(/mail/i).fill(`${role}@example.org`);
	await page.getByLabel(/password/i).fill(desk.password);
	await page.getByRole('button', { name: /sign in/i }).click();
	await page.waitForURL(/\/floors\/saltmarsh-ground/);
}

const slips = (page: Page) => page.getByRole('region', { name: /alarms/i }).getByRole('article');

test('an operator sees a robot get stuck in a crowd, opens its pin, acknowledges, and finds it so after a reload', async ({
	page
}) => {
	const violations: string[] = [];
	page.on('console', (message) => {
		if (/content security policy/i.test(message.text())) violations.push(message.text());
	});
	await signIn(page, 'operator');
	await expect(page.getByText(/live \d/)).toBeVisible();

	fleet = startFleet({
		scenario: 'stuck',
		robots: 1,
		seed: 7,
		url: desk.mqttUrl,
		credentials: desk.credentials
	});
	await fleet.ready;
	const slip = slips(page).first();
	await expect(slip).toBeVisible({ timeout: 60_000 });
	const shownAt = Date.now();
	const truth = fleet.truth.halts.find(({ kind }) => kind === 'freeze');
	expect(truth, 'the robot is stuck in truth').toBeDefined();
	// A fact of the job, not of this machine's speed: the slip is there within 10 s of the true onset.
	expect(shownAt - fleet.wallTime(truth!.onset)).toBeLessThan(10_000);

	await expect(slip).toContainText(/Foyer/);
	await expect(slip).toContainText('Send someone');
	await page
		.getByRole('button', { name: /incident|halt/i })
		.first()
		.click();
	await expect(page.getByText(/room alone/i).first()).toBeVisible();

	await slip.getByRole('button', { name: 'Acknowledge' }).click();
	await expect(slip).toContainText(/Acknowledged by Control room/);

	await page.reload();
	await expect(slips(page).first()).toContainText(/Acknowledged by Control room.*\d\d:\d\d/s);
	expect(violations).toEqual([]);
});

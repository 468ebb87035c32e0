import { mkdtemp, readdir, readFile, rm, stat, writeFile } from 'node:fs/promises';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterEach, beforeEach, expect, it } from 'vitest';
import type { RobotCredential } from './credentials.ts';
import { mosquittoConfiguration, writeMosquittoFiles } from './mosquitto-files.ts';

const SERVICE = { username: 'desk', password: 'pebble' };
const credential = (id: number, robot: string, mosquittoHash: string | null, venue = 'saltmarsh'): RobotCredential => ({
	id,
	venue,
	robot,
	passwordHash: '',
	mosquittoHash
});

let folder = '';
beforeEach(async () => {
	folder = await mkdtemp(join(tmpdir(), 'mosquitto-'));
});
afterEach(() => rm(folder, { recursive: true, force: true }));

it('gives each robot and the application one line, the newest secret of a robot counting', async () => {
	const files = await writeMosquittoFiles(
		folder,
		[credential(1, 'porter-01', '$7$old'), credential(2, 'porter-02', '$7$two'), credential(3, 'porter-01', '$7$new')],
		SERVICE
	);
	const lines = (await readFile(files.passwordFile, 'utf8')).trimEnd().split('\n');
	expect(lines.slice(0, 2)).toEqual(['saltmarsh/porter-01:$7$new', 'saltmarsh/porter-02:$7$two']);
	expect(lines[2]).toMatch(/^desk:\$7\$101\$/);
	expect(lines).toHaveLength(3);
});

it('names the robots that cannot be let in instead of giving them an empty password', async () => {
	const { without, passwordFile } = await writeMosquittoFiles(folder, [credential(1, 'porter-01', null)], SERVICE);
	expect(without).toEqual(['saltmarsh/porter-01']);
	expect(await readFile(passwordFile, 'utf8')).not.toContain('porter-01');
});

it('leaves files only their owner can read, and nothing else, also over older ones', async () => {
	await writeFile(join(folder, 'passwd'), 'old', { mode: 0o644 });
	await writeMosquittoFiles(folder, [], SERVICE);
	expect((await readdir(folder)).sort()).toEqual(['acl', 'mosquitto.conf.sample', 'passwd']);
	for (const name of await readdir(folder)) expect((await stat(join(folder, name))).mode & 0o777).toBe(0o600);
});

it.each(['po:rter', 'porter\nroot', '+', '#', 'a/b', ''])('refuses a robot called %j', async (robot) => {
	await expect(writeMosquittoFiles(folder, [credential(1, robot, '$7$x')], SERVICE)).rejects.toMatchObject({
		code: 'bad_input'
	});
	expect(await readdir(folder)).toEqual([]);
});

it('refuses a name of the application that would add lines of its own', async () => {
	const service = { username: 'desk\ntopic readwrite #', password: 'x' };
	await expect(writeMosquittoFiles(folder, [], service)).rejects.toMatchObject({ code: 'bad_input' });
});

it('says in one sentence that the folder cannot be written', async () => {
	await writeFile(join(folder, 'file'), '');
	await expect(writeMosquittoFiles(join(folder, 'file', 'below'), [], SERVICE)).rejects.toMatchObject({
		name: 'Failure',
		code: 'storage'
	});
});

it('writes a configuration in which only robots have their client id replaced', () => {
	const text = mosquittoConfiguration({ passwordFile: '/p', accessFile: '/a', robotPort: 7, servicePort: 8 });
	expect(text).toContain('listener 7\nuse_username_as_clientid true\n');
	expect(text).toMatch(/listener 8 127\.0\.0\.1\n$/);
	expect(text).toContain('allow_anonymous false');
});

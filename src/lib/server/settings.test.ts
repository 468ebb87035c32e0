import { describe, expect, it } from 'vitest';
import { Failure } from '../domain/failure.ts';
import { readSettings } from './settings.ts';

describe('settings', () => {
	it('work without any variable: own broker on this machine only, with a password nobody chose', () => {
		const settings = readSettings({});
		expect(settings).toMatchObject({
			databasePath: 'data/elbowroom.db',
			mqtt: { url: null, host: '127.0.0.1', port: 1883, username: 'elbowroom' },
			engineVenues: [],
			metricsToken: null
		});
		expect(settings.mqtt.password).toHaveLength(32);
		expect(readSettings({}).mqtt.password).not.toBe(settings.mqtt.password);
	});

	it('take an empty variable for unset', () => {
		expect(readSettings({ MQTT_PORT: '', MQTT_URL: '', ENGINE_VENUES: '' })).toMatchObject({
			mqtt: { url: null, port: 1883 },
			engineVenues: []
		});
	});

	it('use the account given for an external broker and make none up', () => {
		const { mqtt } = readSettings({ MQTT_URL: 'mqtts://broker.example.org:8883', MQTT_USERNAME: 'desk' });
		expect(mqtt).toMatchObject({ url: 'mqtts://broker.example.org:8883', username: 'desk', password: '' });
	});

	it('write files for a Mosquitto only when they say how to reach it', () => {
		const broker = { MQTT_URL: 'mqtt://127.0.0.1', MQTT_USERNAME: 'desk', MQTT_PASSWORD: 'secret' };
		expect(() => readSettings({ MOSQUITTO_DIR: 'data/mosquitto' })).toThrow(/needs MQTT_URL/);
		expect(readSettings({ MOSQUITTO_DIR: 'data/mosquitto', ...broker }).mosquittoDir).toBe('data/mosquitto');
	});

	it('split the list of venues', () => {
		expect(readSettings({ ENGINE_VENUES: 'saltmarsh, quay ,' }).engineVenues).toEqual(['saltmarsh', 'quay']);
	});

	it('name every wrong variable at once', () => {
		const wrong = {
			MQTT_URL: 'https://broker.example.org',
			MQTT_PORT: '70000',
			LOG_LEVEL: 'loud',
			SESSION_DAYS: 'a week',
			METRICS_TOKEN: 'short'
		};
		expect.assertions(6);
		try {
			readSettings(wrong);
		} catch (cause) {
			expect(cause).toBeInstanceOf(Failure);
			for (const name of Object.keys(wrong)) expect((cause as Failure).message).toContain(name);
		}
	});

	it('cannot be changed afterwards', () => {
		const settings = readSettings({});
		expect(Object.isFrozen(settings) && Object.isFrozen(settings.mqtt) && Object.isFrozen(settings.engineVenues)).toBe(
			true
		);
	});
});

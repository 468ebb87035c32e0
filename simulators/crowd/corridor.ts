/** A straight corridor whose ends are joined: the standard test of how walking speed falls with density. */

import { createNavGrid } from '../core/nav-grid.ts';
import { createRandom } from '../core/random.ts';
import { Population, WALKING } from './population.ts';
import { Walking } from './walking.ts';

export interface CorridorResult {
	/** persons/m² over the measured middle part, mean over time */
	readonly density: number;
	/** m/s along the corridor in the same part, mean over persons and time */
	readonly speed: number;
	/** Share of person-samples whose nearest neighbour is closer than 0.3 m, centre to centre */
	readonly tooClose: number;
	/** Person-samples outside the corridor's side walls */
	readonly outside: number;
}

const LENGTH = 40;
const WIDTH = 4;

/** @param persons number walking; @param seconds simulated after 20 s of settling */
export function measureCorridor(persons: number, seconds: number, seed: number, dt = 0.1): CorridorResult {
	const random = createRandom(seed);
	const floor = {
		walkable: {
			outer: [
				[-2, 0],
				[LENGTH + 2, 0],
				[LENGTH + 2, WIDTH],
				[-2, WIDTH]
			] as const,
			holes: []
		},
		walls: []
	};
	const grid = createNavGrid(floor, 0.2);
	const people = new Population(grid.walls.bounds, persons);
	const walking = new Walking(people, grid, random.fork('walking'));
	for (let i = 0; i < persons; i++) {
		const slot = people.add({
			x: (i + 0.5) * (LENGTH / persons),
			y: random.between(0.3, WIDTH - 0.3),
			speed: Math.max(0.5, random.normal(1.34, 0.26)),
			radius: 0.2,
			yields: true,
			group: 0
		});
		people.mode[slot] = WALKING;
	}
	let [samples, speed, inside, close, outside, steps] = [0, 0, 0, 0, 0, 0];
	for (let time = 0; time < 20 + seconds; time += dt) {
		for (let i = 0; i < persons; i++) {
			if (people.x[i]! > LENGTH) people.x[i]! -= LENGTH;
			people.goalX[i] = people.x[i]! + 30;
			people.goalY[i] = people.y[i]!;
		}
		walking.step(dt, []);
		if (time < 20) continue;
		steps++;
		for (let i = 0; i < persons; i++) {
			if (people.y[i]! < 0 || people.y[i]! > WIDTH) outside++;
			if (people.x[i]! < 10 || people.x[i]! > 30) continue;
			inside++;
			speed += people.vx[i]!;
			let nearest = Infinity;
			people.near(people.x[i]!, people.y[i]!, 0.3, (j, d) => {
				if (j !== i) nearest = Math.min(nearest, d);
			});
			if (nearest < 0.3) close++;
			samples++;
		}
	}
	return { density: inside / steps / (20 * WIDTH), speed: speed / samples, tooClose: close / samples, outside };
}

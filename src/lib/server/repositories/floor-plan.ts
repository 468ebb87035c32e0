/** The JSON columns that hold drawings: written and read through these schemas only. Metres in the floor frame. */

import { z } from 'zod';
import type { Polygon } from '../../domain/geometry/types.ts';

const Corner = z.tuple([z.number(), z.number()]);
const Ring = z.array(Corner).min(3);

export const PolygonJson = z.object({ outer: Ring, holes: z.array(Ring) }) satisfies z.ZodType<Polygon>;

export const PlanJson = z.object({
	walkable: PolygonJson,
	walls: z.array(z.object({ ax: z.number(), ay: z.number(), bx: z.number(), by: z.number() })),
	edges_block_sight: z.boolean(),
	waiting_places: z.array(z.object({ x: z.number(), y: z.number(), radius: z.number().positive() })),
	/** Words on the drawing that are no zone: a door, a stand. */
	labels: z.array(z.object({ text: z.string(), x: z.number(), y: z.number() })).optional()
});

export type PlanJson = z.infer<typeof PlanJson>;

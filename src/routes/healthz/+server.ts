import { sql } from 'kysely';
import type { RequestHandler } from './$types';

/** For load balancers and service managers: 200 while the desk can do its work, else 503. A broker that is away is no reason to restart the desk. */
export const GET: RequestHandler = async ({ locals }) => {
	const { db, threads } = locals.app;
	const { engine, storage } = threads.health();
	const works = engine && storage && (await canRead(db));
	return Response.json(
		{ status: works ? 'ok' : 'failing' },
		{ status: works ? 200 : 503, headers: { 'cache-control': 'no-store' } }
	);
};

async function canRead(db: App.Locals['app']['db']): Promise<boolean> {
	try {
		await sql`SELECT 1 FROM setting LIMIT 1`.execute(db);
		return true;
	} catch {
		return false;
	}
}

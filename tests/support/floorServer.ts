import express from 'express';
import helmet from 'helmet';
import { Pool } from 'pg';
import { pino } from 'pino';
import { pinoHttp } from 'pino-http';

/**
 * What the usual parts cost with nothing of ours in between: Express with helmet, JSON and a request log, and one
 * statement by the driver alone. Nobody is signed in and nothing is checked. The statement and its values come from
 * the benchmark, as JSON in the environment.
 */
const { text, values, path } = JSON.parse(process.env.FLOOR ?? '{}') as {
  text: string;
  values: unknown[];
  path: string;
};
const pool = new Pool({ connectionString: process.env.DATABASE_APP_URL, max: 10 });
const app = express();
app.use(helmet());
app.use(express.json());
app.use(pinoHttp({ logger: pino() }));
app.get(path, async (_request, response) => {
  const { rows } = await pool.query(text, values);
  response.json({ guests: rows });
});
app.get('/api/health', (_request, response) => {
  response.json({ status: 'ok' });
});
app.listen(Number(process.env.PORT), '127.0.0.1');

import { connectDataSource, createDataSource } from '../../server/database/data-source.ts';
import { startJobRunner } from './imports.ts';

/** A worker process that runs import jobs only, to be killed by a test: `DATABASE_URL`, `WORKER_NAME`. */
const dataSource = createDataSource({ url: process.env.DATABASE_URL!, poolSize: 6 });
await connectDataSource(dataSource, { waitSeconds: 10 });
startJobRunner(dataSource, process.env.WORKER_NAME);
process.stdout.write('working\n');

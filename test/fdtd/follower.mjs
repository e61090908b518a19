import { workerData } from 'node:worker_threads';

const { follow } = await import(workerData.entry);
follow(workerData.setup);

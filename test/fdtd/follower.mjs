/** A thread that follows one run after another. */
import { parentPort, workerData } from 'node:worker_threads';

const { follow } = await import(workerData.entry);
parentPort.on('message', (setup) => {
  follow(setup);
  parentPort.postMessage('left');
});

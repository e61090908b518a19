/** A thread that follows one run after another. */
import { parentPort, workerData } from 'node:worker_threads';

const { follow } = await import(workerData.entry);
parentPort.on('message', (setup) => {
  follow(setup);
  // Where garbage can be collected on request, the memory of the run is given back at once.
  globalThis.gc?.();
  parentPort.postMessage('left');
});

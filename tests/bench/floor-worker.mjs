// One thread of the yardstick: satellite.js's bulk WebAssembly propagator, position and velocity of every
// object at every time it is given.
import { parentPort, workerData } from 'node:worker_threads';
import { BulkPropagator, createSingleThreadRuntime, EciBaseCalculator, json2satrec } from 'satellite.js';

const { records, startMs, stepMs, batch } = workerData;
const propagator = new BulkPropagator({
  runtime: await createSingleThreadRuntime(),
  calculators: [new EciBaseCalculator()],
  satRecsCount: records.length,
  datesCount: batch,
});
propagator.setSatRecs(records.map((record) => json2satrec(record)));
parentPort.on('message', ({ from, count }) => {
  for (let k = from; k < from + count; k += batch) {
    const dates = Array.from(
      { length: Math.min(batch, from + count - k) },
      (_, i) => new Date(startMs + (k + i) * stepMs),
    );
    propagator.setDates(dates);
    propagator.run();
  }
  parentPort.postMessage('done');
});
parentPort.postMessage('ready');

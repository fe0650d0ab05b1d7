import { startNodePool } from '../../run/node-pool.ts';
import { channels, sceneAt, squareBundle } from './prepare.ts';
import { cell } from './timing.ts';

/** How much quicker two threads are than one, by the clock. */
export async function compareWorkers(): Promise<void> {
  const job = { scene: sceneAt(40), spectrum: channels(3).map((hz) => ({ frequencyHz: hz, centreHz: hz })), bundle: squareBundle(301), origins: false as const };
  const seconds: number[] = [];
  for (const workers of [1, 2]) {
    const pool = startNodePool(workers);
    let best = Infinity;
    await pool.backend(job);
    for (let k = 0; k < 5; k++) {
      const start = performance.now();
      await pool.backend(job);
      best = Math.min(best, (performance.now() - start) / 1e3);
    }
    await pool.close();
    seconds.push(best);
  }
  console.log('\nworkers, s by the clock for 301² pixels of three channels (means little where something else runs)');
  console.log(`one ${cell(seconds[0])}   two ${cell(seconds[1])}   ratio ${cell(seconds[0] / seconds[1])}`);
}

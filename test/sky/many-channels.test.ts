import { expect, test } from 'vitest';
import { localBackend } from '../../src/ray/job.ts';
import { sceneOf } from '../ray/scenes.ts';
import { randomScene } from '../ray/random-scene.ts';
import type { Band, Scene } from '../../src/scene/types.ts';
import { chooseWays, followBands } from '../../src/sky/follow-bands.ts';
import { planSpectrum } from '../../src/sky/spectral-plan.ts';
import { channelPlanes } from '../../src/sky/channel-basis.ts';
import { bandCube } from '../../src/sky/channel-means.ts';

function band(fromHz: number, toHz: number, count: number, isWide = true): Band {
  const widthHz = (toHz - fromHz) / count;
  return { name: 'b', centreHz: (fromHz + toHz) / 2, channels: Array.from({ length: count }, (_, k) => ({ frequencyHz: fromHz + (k + 0.5) * widthHz, widthHz: isWide ? widthHz : 0 })) };
}

test('try', async () => {
  for (let k = 0; k < 12; k++) {
    const { parts, rays: [north, east] } = randomScene(k, 1e-4, 200);
    const scene = sceneOf({ ...parts, ...(k % 3 === 0 && { layers: [parts.layers[0].replace('}', ', heightIndex: 0.5, heightAt: 1.4 GHz}')] }) });
    const bundle = { northKpc: Float64Array.from(north), eastKpc: Float64Array.from(east) };
    const b = [band(1.3e9, 1.7e9, 128), band(0.3e9, 10e9, 128, false), band(2e9, 4e9, 300), band(0.6e9, 0.8e9, 64)][k % 4];
    const backend = localBackend();
    const ways = await chooseWays(scene, bundle, [b], 12, backend);
    const [way] = ways;
    const plan = planSpectrum(scene, bundle, [b], { foreground: 12 });
    const text = way.kind === 'nodes' ? `${way.interpolation.nodes.degrees}x${way.interpolation.nodes.offsetsHz.length} plain ${way.interpolation.isPlainI}` : 'direct';
    const got = await followBands(scene, bundle, [b], 12, ways, backend);
    const want = await followBands(scene, bundle, [b], 12, [{ kind: 'direct', plan }], backend);
    const n = b.channels.length; const R = north.length;
    const all = (x: typeof got, s: 'I' | 'Q' | 'U') => channelPlanes(x.bases[0][s], R, 0, n);
    let worst = [0, 0];
    const g = { I: all(got, 'I'), Q: all(got, 'Q'), U: all(got, 'U') }; const w = { I: all(want, 'I'), Q: all(want, 'Q'), U: all(want, 'U') };
    for (let c = 0; c < n; c++) {
      let [si, sp] = [0, 0];
      for (let r = 0; r < R; r++) { si = Math.max(si, w.I[c * R + r]); sp = Math.max(sp, Math.hypot(w.Q[c * R + r], w.U[c * R + r])); }
      sp = Math.max(sp, 1e-3 * si);
      for (let r = 0; r < R; r++) { worst = [Math.max(worst[0], Math.abs(g.I[c * R + r] - w.I[c * R + r]) / si), Math.max(worst[1], Math.hypot(g.Q[c * R + r] - w.Q[c * R + r], g.U[c * R + r] - w.U[c * R + r]) / sp)]; }
    }
    const terms = got.bases[0].Q.planes.length / R;
    console.log(k, text, 'direct', plan.spectrum.length, 'terms', terms, worst, 'stated', got.error, want.error);
  }
}, 120000);

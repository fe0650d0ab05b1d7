import { spawn, spawnSync, type ChildProcess } from 'node:child_process';
import { existsSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { afterAll, beforeAll, describe, expect, it } from 'vitest';
import { gyrelight, repository, type Outcome } from '../cli/run.ts';
import { quickScene } from '../cli/sweep-kill.ts';
import { prepareStudy, study } from '../cli/small-study.ts';
import { Cluster, findMissing, needSlurm } from './cluster.ts';

const sweep = `gyrelight-sweep: 1
title: For the cluster
scene: small.scene.yaml
vary:
  galaxy.inclination: {from: 10 deg, to: 70 deg, steps: 7}
  field.halo.core: [1 kpc, 3 kpc]
realisations: 2
sectors: 12
measure: [asymmetry, polarization, detectability]
`;

/** A real Slurm of four nodes on this machine. The same rows computed by one machine are what it is held to. */
describe('a cluster', () => {
  let cluster: Cluster | undefined;
  const folder = mkdtempSync(join(tmpdir(), 'gyrelight-sweep-'));
  const program = repository('test/cluster/troubled.mjs');
  let local: readonly Buffer[] = [];

  beforeAll(async () => {
    if (findMissing() !== undefined) return;
    writeFileSync(join(folder, 'small.scene.yaml'), quickScene);
    writeFileSync(join(folder, 'c.sweep.yaml'), sweep);
    expect(gyrelight(['sweep', 'c.sweep.yaml', '--out', 'local', '--quiet'], folder).status).toBe(0);
    local = tables('local');
    cluster = new Cluster();
    await cluster.start();
  });
  afterAll(async () => {
    await cluster?.stop();
    rmSync(folder, { recursive: true, force: true });
  });

  const tables = (out: string): readonly Buffer[] => ['sweep.csv', 'sweep.parquet'].map((name) => readFileSync(join(folder, out, name)));
  const parameters = (out: string, ...more: readonly string[]): string[] => ['sweep', 'c.sweep.yaml', '--out', out, '--engine', 'slurm', '--poll', '0.3', ...more];
  const environment = (more: NodeJS.ProcessEnv = {}): NodeJS.ProcessEnv => ({ ...(cluster?.environment ?? {}), ...more });
  const run = (given: readonly string[], more: NodeJS.ProcessEnv = {}): Outcome => {
    const { status, stdout, stderr } = spawnSync(process.execPath, [program, ...given], { cwd: folder, env: environment(more), encoding: 'utf8' });
    return { status, stdout, stderr };
  };
  const start = (given: readonly string[], more: NodeJS.ProcessEnv = {}): { readonly driver: ChildProcess; readonly ended: Promise<number | null>; readonly said: () => string } => {
    const driver = spawn(process.execPath, [program, ...given], { cwd: folder, env: environment(more) });
    let text = '';
    driver.stderr.on('data', (chunk: Buffer) => (text += chunk.toString()));
    return { driver, ended: new Promise((resolve) => driver.once('exit', (code) => resolve(code))), said: () => text };
  };
  const parts = (out: string): string[] => (existsSync(join(folder, out, 'store')) ? readdirSync(join(folder, out, 'store')).filter((name) => name.startsWith('part-')) : []);
  const stateOf = (state: string): string[] => (cluster?.call('squeue', ['--noheader', '--array', `--states=${state}`, '--format=%N']) ?? '').split('\n').filter(Boolean);
  const expectLocal = (out: string): void => tables(out).forEach((table, k) => expect(table.equals(local[k])).toBe(true));

  it('computes what this machine computes, byte for byte, and twice does no harm', (context) => {
    needSlurm(context);
    const { status, stderr } = run(parameters('plain', '--tasks', '5'));
    expect(stderr).not.toContain('gyrelight:');
    expect(status).toBe(0);
    expectLocal('plain');
    expect(parts('plain')).toHaveLength(5);
    // A task is done twice at the same time by two nodes, its part lost before.
    const [part] = parts('plain');
    const whole = readFileSync(join(folder, 'plain/store', part));
    rmSync(join(folder, 'plain/store', part));
    const again = `cd ${folder}; ${process.execPath} ${program} task plain/cluster ${part.slice(5, -8)}`;
    expect(spawnSync('sh', ['-c', `(${again}) & (${again}) & wait; ${again}`]).status).toBe(0);
    expect(readFileSync(join(folder, 'plain/store', part)).equals(whole)).toBe(true);
    expect(run(parameters('plain', '--tasks', '5', '--resume')).status).toBe(0);
    expectLocal('plain');
    expect(cluster?.call('squeue', ['--noheader', '--states=all', '--format=%F']).trim().split('\n').length).toBe(5);
  });

  it('loses a node, fails twice and loses its driver, and ends with the same bytes', async (context) => {
    needSlurm(context);
    const trouble = { SLOW_MS: '2500', FAILURES: '2' };
    const given = parameters('trouble', '--tasks', '8');
    const first = start(given, trouble);
    await cluster?.until('four tasks run', () => stateOf('RUNNING').length === 4, 15);
    cluster?.killNode('n2');
    await cluster?.until('a part is there', () => parts('trouble').length > 0, 15);
    first.driver.kill('SIGKILL');
    await first.ended;
    expect(parts('trouble').length).toBeLessThan(8);
    const second = start([...given, '--resume'], trouble);
    await cluster?.until('the node is known to be lost', () => (cluster?.call('sinfo', ['--noheader', '--Node', '--nodes=n2', '--format=%t']) ?? '').startsWith('down'), 30);
    expect(await second.ended, second.said()).toBe(0);
    expect(readFileSync(join(folder, 'trouble/cluster/tries'), 'utf8')).toBe('xx');
    expectLocal('trouble');
    cluster?.startNode('n2');
  });

  it('names a task that fails for good, with its last words, and keeps the others', (context) => {
    needSlurm(context);
    const { status, stderr } = run(parameters('broken', '--tasks', '4', '--retries', '1'), { FAILURES: '99' });
    expect(status).toBe(1);
    expect(stderr).toMatch(/1 of 4 tasks failed 2 times; the others are done and kept.*\n {2}scenes 0 to 2: FAILED: broken on purpose/);
    expect(readFileSync(join(folder, 'broken/cluster/tries'), 'utf8')).toBe('xx');
    expect(parts('broken')).toHaveLength(3);
    expect(existsSync(join(folder, 'broken/sweep.csv'))).toBe(false);
    // What is left is little: this machine does it.
    expect(gyrelight(['sweep', 'c.sweep.yaml', '--out', 'broken', '--resume', '--quiet'], folder).status).toBe(0);
    expectLocal('broken');
  });

  it('stops where it is cancelled, and goes on from there', async (context) => {
    needSlurm(context);
    const { ended, said } = start(parameters('cancelled', '--tasks', '8'), { SLOW_MS: '1500' });
    await cluster?.until('a part is there', () => parts('cancelled').length > 0, 15);
    const shown = run(['tasks', 'cancelled', '--json']);
    expect(JSON.parse(shown.stdout)).toMatchObject({ arrays: 1 });
    expect(run(['tasks', 'cancelled', '--cancel']).stdout).toMatch(/tasks? cancelled; what is done is kept/);
    expect(await ended).toBe(1);
    expect(said()).toMatch(/cancelled on the cluster; what is done is kept, and --resume goes on/);
    expect(parts('cancelled').length).toBeLessThan(8);
    expect(run(parameters('cancelled', '--tasks', '8', '--resume')).status).toBe(0);
    expectLocal('cancelled');
  });

  it('samples in independent runs: the posterior is that of the same runs on this machine', (context) => {
    needSlurm(context);
    prepareStudy(folder);
    const given = (out: string): string[] => ['fit', 'a.study.yaml', '--hypothesis', 'weaker halo', '--out', out, '--live', '24', '--starts', '0', '--quiet'];
    expect(gyrelight([...given('here'), '--runs', '3'], folder).status).toBe(0);
    const { status, stderr } = run([...given('there'), '--engine', 'slurm', '--tasks', '3', '--poll', '0.3']);
    expect(status, stderr).toBe(0);
    for (const name of ['fit.json', 'posterior/posterior.csv']) {
      expect(readFileSync(join(folder, 'there', name), 'utf8')).toBe(readFileSync(join(folder, 'here', name), 'utf8'));
    }
    writeFileSync(join(folder, 'least.study.yaml'), study.replace('method: nested', 'method: least-squares'));
    expect(run(['rank', 'least.study.yaml', '--engine', 'slurm', '--quiet']).stderr).toMatch(/--engine slurm: a cluster serves nested sampling, as independent runs; here the method is least-squares/);
  });
});

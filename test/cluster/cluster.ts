import { spawn, spawnSync, type ChildProcess } from 'node:child_process';
import { randomBytes } from 'node:crypto';
import { existsSync, mkdirSync, mkdtempSync, readdirSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { createServer } from 'node:net';
import { hostname, tmpdir } from 'node:os';
import { join } from 'node:path';
import type { TestContext } from 'vitest';
import { hasCommand } from '../support/tools.ts';

const nodes = ['n0', 'n1', 'n2', 'n3'];

/** Why there can be no cluster here, with the remedy; undefined where there can. */
export function findMissing(): string | undefined {
  const missing = ['munged', 'slurmctld', 'slurmd', 'sbatch'].filter((name) => !hasCommand(name));
  if (missing.length > 0) return `needs ${missing.join(', ')}: apt-get install slurm-wlm munge`;
  return process.getuid?.() === 0 ? undefined : 'needs root: slurmd runs as no one else';
}

/** Skips the test where there can be no cluster. */
export function needSlurm(context: TestContext): void {
  const reason = findMissing();
  if (reason !== undefined) context.skip(reason);
}

/** A Slurm of four nodes of one core each, all on this machine, without accounting; everything lies in one folder. */
export class Cluster {
  readonly environment: NodeJS.ProcessEnv;
  private readonly folder = mkdtempSync(join(tmpdir(), 'gyrelight-slurm-'));
  private readonly processes = new Map<string, ChildProcess>();

  constructor() {
    this.environment = { ...process.env, SLURM_CONF: join(this.folder, 'slurm.conf') };
  }

  async start(): Promise<void> {
    const at = (name: string): string => join(this.folder, name);
    for (const name of ['state', ...nodes.map((node) => `spool-${node}`)]) mkdirSync(at(name));
    const [controller, ...ports] = await freePorts(nodes.length + 1);
    writeFileSync(at('munge.key'), randomBytes(128), { mode: 0o400 });
    writeFileSync(at('slurm.conf'), [
      'ClusterName=gyrelight', `SlurmctldHost=${hostname()}(127.0.0.1)`, `SlurmctldPort=${controller}`, 'SlurmUser=root', 'SlurmdUser=root',
      'AuthType=auth/munge', 'CredType=cred/munge', `AuthInfo=socket=${at('munge.socket')},cred_expire=5`,
      `StateSaveLocation=${at('state')}`, `SlurmdSpoolDir=${at('spool-%n')}`, `SlurmctldPidFile=${at('slurmctld.pid')}`, `SlurmdPidFile=${at('slurmd-%n.pid')}`,
      `SlurmctldLogFile=${at('slurmctld.log')}`, `SlurmdLogFile=${at('slurmd-%n.log')}`,
      'ProctrackType=proctrack/linuxproc', 'TaskPlugin=task/none', 'SelectType=select/cons_tres', 'SelectTypeParameters=CR_CPU', 'MpiDefault=none',
      'MessageTimeout=5', 'TCPTimeout=1', 'SlurmdTimeout=5', 'ReturnToService=2', 'MinJobAge=86400', 'SlurmdParameters=config_overrides', 'KillWait=2',
      'SchedulerParameters=sched_interval=1,batch_sched_delay=0,sched_min_interval=100000', 'AccountingStorageType=accounting_storage/none', 'JobAcctGatherType=jobacct_gather/none',
      ...nodes.map((node, k) => `NodeName=${node} NodeHostname=${hostname()} NodeAddr=127.0.0.1 Port=${ports[k]} CPUs=1 State=UNKNOWN`),
      'PartitionName=all Nodes=ALL Default=YES MaxTime=INFINITE State=UP', '',
    ].join('\n'));
    this.spawn('munged', ['munged', '--foreground', '--force', `--key-file=${at('munge.key')}`, `--socket=${at('munge.socket')}`, `--pid-file=${at('munged.pid')}`, `--log-file=${at('munged.log')}`, `--seed-file=${at('munge.seed')}`]);
    await this.until('munged answers', () => existsSync(at('munge.socket')), 10);
    this.spawn('slurmctld', ['slurmctld', '-D', '-c']);
    for (const node of nodes) this.startNode(node);
    await this.until('four nodes are idle', () => this.call('sinfo', ['--noheader', '--Node', '--format=%t']).split('\n').filter((state) => state === 'idle').length === nodes.length, 30);
  }

  startNode(node: string): void {
    this.spawn(node, ['slurmd', '-D', '-N', node]);
  }

  /** The node dies as one that loses its power: its daemon, its steps and their processes. */
  killNode(node: string): void {
    const daemon = this.processes.get(node);
    this.processes.delete(node);
    for (const pid of [...stepsOf(node).flatMap((step) => [step, ...descendantsOf(step)]), ...(daemon?.pid === undefined ? [] : [daemon.pid])]) killQuietly(pid);
  }

  /** One of Slurm's commands; '' where it fails. */
  call(command: string, parameters: readonly string[]): string {
    return spawnSync(command, parameters, { env: this.environment, encoding: 'utf8' }).stdout ?? '';
  }

  /** Waits until something holds. Throws with the logs where it does not in time. */
  async until(what: string, holds: () => boolean, seconds: number): Promise<void> {
    const end = Date.now() + 1000 * seconds;
    while (!holds()) {
      if (Date.now() > end) throw new Error(`${what}: not within ${seconds} s\n${this.logs()}`);
      await new Promise((resolve) => setTimeout(resolve, 100));
    }
  }

  /** Cancels every job, ends every process that was started here, and removes the folder. */
  async stop(): Promise<void> {
    if (this.processes.has('slurmctld')) {
      this.call('scancel', ['--quiet', '--user=root']);
      const end = Date.now() + 6000;
      while (this.call('squeue', ['--noheader']).trim() !== '' && Date.now() < end) await new Promise((resolve) => setTimeout(resolve, 200));
    }
    const steps = nodes.flatMap((node) => stepsOf(node).flatMap((step) => [step, ...descendantsOf(step)]));
    for (const name of [...nodes, 'slurmctld', 'munged']) {
      const one = this.processes.get(name);
      if (!one || one.exitCode !== null) continue;
      const gone = new Promise((resolve) => one.once('exit', resolve));
      one.kill('SIGTERM');
      const late = setTimeout(() => one.kill('SIGKILL'), 4000);
      await gone;
      clearTimeout(late);
    }
    steps.forEach(killQuietly);
    rmSync(this.folder, { recursive: true, force: true });
  }

  private spawn(name: string, [command, ...parameters]: readonly string[]): void {
    this.processes.set(name, spawn(command, parameters, { env: this.environment, stdio: 'ignore' }));
  }

  private logs(): string {
    return readdirSync(this.folder).filter((name) => name.endsWith('.log')).map((name) => `${name}:\n${readFileSync(join(this.folder, name), 'utf8').split('\n').slice(-12).join('\n')}`).join('\n');
  }
}

/** Step daemons that a node's slurmd has started: they call themselves by the job, and know their node. */
function stepsOf(node: string): number[] {
  return processes().filter((pid) => read(`/proc/${pid}/comm`).startsWith('slurmstepd') && read(`/proc/${pid}/environ`).includes(`gyrelight-slurm-`) && nodeOfStep(pid) === node);
}

function nodeOfStep(pid: number): string {
  const child = [pid, ...descendantsOf(pid)].map((one) => /SLURMD_NODENAME=(\w+)/.exec(read(`/proc/${one}/environ`))?.[1]).find((name) => name !== undefined);
  return child ?? '';
}

function descendantsOf(pid: number): number[] {
  const children = processes().filter((one) => Number(/\) \S (\d+)/.exec(read(`/proc/${one}/stat`))?.[1]) === pid);
  return children.flatMap((child) => [child, ...descendantsOf(child)]);
}

function processes(): number[] {
  return readdirSync('/proc').filter((name) => /^\d+$/.test(name)).map(Number);
}

function read(path: string): string {
  try {
    return readFileSync(path, 'latin1');
  } catch {
    return '';
  }
}

function killQuietly(pid: number): void {
  try {
    process.kill(pid, 'SIGKILL');
  } catch {
    // It has ended already.
  }
}

async function freePorts(count: number): Promise<number[]> {
  const servers = await Promise.all(Array.from({ length: count }, () => new Promise<ReturnType<typeof createServer>>((resolve) => {
    const server = createServer();
    server.listen(0, '127.0.0.1', () => resolve(server));
  })));
  const ports = servers.map((server) => (server.address() as { port: number }).port);
  await Promise.all(servers.map((server) => new Promise((resolve) => server.close(resolve))));
  return ports;
}

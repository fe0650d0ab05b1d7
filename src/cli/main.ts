import { Command, CommanderError } from 'commander';
import { InputError } from '../units/input-error.ts';
import { addApp } from './app.ts';
import { addCheck } from './check.ts';
import { addCompare } from './compare.ts';
import { addDynamo } from './dynamo.ts';
import { addFit } from './fit.ts';
import { addForecast } from './forecast.ts';
import { addMap } from './map.ts';
import { addMeasure } from './measure.ts';
import { addOrient } from './orient.ts';
import { addProbe } from './probe.ts';
import { addRank } from './rank.ts';
import { addSweep } from './sweep.ts';
import { addTask } from './task.ts';
import { addTasks } from './tasks.ts';
import { Cancelled } from './run-context.ts';
import { version } from '../files/version.ts';

/** Exit codes: the input is wrong; a bug or a failed resource; stopped by the user. */
const exitCode = { input: 2, failure: 1, cancelled: 130 } as const;

function makeProgram(): Command {
  const program = new Command('gyrelight')
    .description("Which three-dimensional magnetic field makes a galaxy's polarized radio maps?")
    .version(version)
    .exitOverride()
    .configureOutput({ writeErr: () => undefined });
  for (const add of [addMap, addCompare, addRank, addFit, addSweep, addTasks, addTask, addForecast, addMeasure, addCheck, addProbe, addDynamo, addOrient, addApp]) add(program);
  for (const command of program.commands) command.exitOverride().configureOutput({ writeErr: () => undefined });
  return program;
}

async function main(): Promise<number> {
  try {
    await makeProgram().parseAsync(process.argv);
    return 0;
  } catch (error) {
    return report(error);
  }
}

/** Says what went wrong on stderr: wrong input without a stack, a bug with it. */
function report(error: unknown): number {
  if (error instanceof CommanderError) {
    if (error.exitCode === 0) return 0;
    if (error.code === 'commander.help') {
      makeProgram().outputHelp({ error: false });
      return exitCode.input;
    }
    say(error.message.replace(/^error: /, ''));
    say('gyrelight --help lists commands, gyrelight COMMAND --help their flags');
    return exitCode.input;
  }
  if (error instanceof InputError) {
    say(error.message);
    return exitCode.input;
  }
  if (error instanceof Cancelled) {
    say(error.message);
    return exitCode.cancelled;
  }
  // By name: errors of worker threads are copies.
  if (error instanceof Error && error.name === 'ResourceError') {
    say(error.message);
    return exitCode.failure;
  }
  if (error instanceof Error && error.name === 'NotANumberError') {
    say(error.message);
    return exitCode.input;
  }
  say(error instanceof Error ? (error.stack ?? error.message) : String(error));
  return exitCode.failure;
}

function say(text: string): void {
  process.stderr.write(`gyrelight: ${text}\n`);
}

process.exitCode = await main();

import type { Command } from 'commander';
import { orientationOf, type OrientClues } from '../scene/orient.ts';
import { InputError } from '../units/input-error.ts';
import { parseQuantity } from '../units/quantity.ts';

interface OrientFlags {
  readonly receding?: string;
  readonly inclination?: string;
  readonly near?: string;
  readonly arms?: string;
  readonly turns?: string;
  readonly json?: boolean;
}

/** `gyrelight orient`: what observers know of a galaxy → inclination and position angle in our convention. */
export function addOrient(program: Command): void {
  program
    .command('orient')
    .description('receding side, near side or arm winding → inclination and position angle in our convention')
    .requiredOption('--receding <angle>', 'position angle of the receding half of the major axis, N through E, such as "25 deg"')
    .requiredOption('--inclination <angle>', 'between the disc and the plane of the sky, 0 to 90 deg: 0 is face-on')
    .option('--near <angle>', 'position angle of the near side of the minor axis, roughly')
    .option('--arms <sense>', 'how the arms run outwards on the sky: clockwise or counter-clockwise (taken to trail)')
    .option('--turns <sense>', 'how the disc turns on the sky: clockwise or counter-clockwise')
    .option('--json', 'machine-readable')
    .action((flags: OrientFlags) => {
      const found = orientationOf(cluesOf(flags));
      const inclination = degrees(found.inclination);
      const positionAngle = degrees(found.positionAngle);
      if (flags.json) {
        process.stdout.write(`${JSON.stringify({ inclination: `${inclination} deg`, positionAngle: `${positionAngle} deg`, turns: found.turns, nearSide: `${degrees(found.nearSide)} deg` }, null, 2)}\n`);
        return;
      }
      process.stdout.write(
        `galaxy: {inclination: ${inclination} deg, positionAngle: ${positionAngle} deg}\n` +
          `# turns ${found.turns} on the sky; near side at position angle ${degrees(found.nearSide)} deg\n`,
      );
    });
}

function cluesOf(flags: OrientFlags): OrientClues {
  const angle = (flag: string, text: string): number => {
    try {
      return parseQuantity(text, 'rad');
    } catch (error) {
      throw error instanceof InputError ? error.at({ flag: `--${flag} ${text}` }) : error;
    }
  };
  const sense = (flag: 'arms' | 'turns'): 'clockwise' | 'counter-clockwise' | undefined => {
    const text = flags[flag];
    if (text === undefined || text === 'clockwise' || text === 'counter-clockwise') return text;
    throw new InputError('expected clockwise or counter-clockwise', { flag: `--${flag} ${text}` });
  };
  return {
    receding: angle('receding', flags.receding ?? ''),
    tilt: angle('inclination', flags.inclination ?? ''),
    ...(flags.near !== undefined && { near: angle('near', flags.near) }),
    arms: sense('arms'),
    turns: sense('turns'),
  };
}

function degrees(angle: number): number {
  return Number(((angle * 180) / Math.PI).toFixed(6));
}

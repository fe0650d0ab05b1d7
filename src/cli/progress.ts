import type { WriteStream } from 'node:tty';

/** One line that says what is being done, how far it is, how fast, and what time is left. */
export interface Progress {
  /** Shows that `done` of `total` units of `what` are done; `detail` is shown behind. */
  show(what: string, done: number, total: number, unit?: string, detail?: string): void;
  /** Ends the line. */
  close(): void;
}

const terminalEveryMs = 100;
const logEveryMs = 5000;

/** Progress on a stream: one line rewritten on a terminal, plain lines now and then in a log. */
export function makeProgress(stream: WriteStream, quiet: boolean): Progress {
  let what = '';
  let start = 0;
  let shown = 0;
  let open = false;
  const end = (): void => {
    if (open) stream.write('\n');
    open = false;
  };
  return {
    show: (task, done, total, unit = '', detail = '') => {
      if (quiet) return;
      const now = Date.now();
      const isNew = task !== what;
      if (isNew) {
        end();
        [what, start, shown] = [task, now, 0];
      }
      const finished = done >= total;
      const every = stream.isTTY ? terminalEveryMs : logEveryMs;
      if (now - shown < every && !(finished && stream.isTTY) && !(isNew && stream.isTTY)) return;
      if (!stream.isTTY && now - start < every && !finished) return;
      shown = now;
      const line = progressLine(task, done, total, (now - start) / 1000, unit, detail);
      if (stream.isTTY) {
        stream.write(`\r\x1b[2K${line.slice(0, (stream.columns || 120) - 1)}`);
        open = true;
        if (finished) end();
      } else stream.write(`${line}\n`);
    },
    close: end,
  };
}

/** `following rays  61 %  51200/83521 rays  30.1 k/s  1 s left`. */
export function progressLine(what: string, done: number, total: number, seconds: number, unit: string, detail: string): string {
  const share = total > 0 ? Math.floor((100 * done) / total) : 100;
  const rate = seconds > 0 ? done / seconds : 0;
  const left = rate > 0 && done < total ? `${durationText((total - done) / rate)} left` : '';
  const parts = [what, `${share} %`, unit ? `${done}/${total} ${unit}` : '', rate > 0 && unit ? `${rateText(rate)}/s` : '', left, detail];
  return parts.filter((part) => part !== '').join('  ');
}

/** A duration in words: 3 s, 2 min 10 s, 1 h 5 min. */
export function durationText(seconds: number): string {
  const whole = Math.round(seconds);
  if (whole < 60) return `${whole} s`;
  if (whole < 3600) return `${Math.floor(whole / 60)} min ${whole % 60} s`;
  return `${Math.floor(whole / 3600)} h ${Math.floor((whole % 3600) / 60)} min`;
}

function rateText(rate: number): string {
  if (rate >= 1e6) return `${(rate / 1e6).toFixed(1)} M`;
  if (rate >= 1e3) return `${(rate / 1e3).toFixed(1)} k`;
  return rate.toPrecision(2);
}

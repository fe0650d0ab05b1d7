import * as Comlink from 'comlink';
import type { DataFiles, Outcome, PageWorker, Task, TaskResult } from './messages.ts';
import type { FitProgressTold } from './work-fit.ts';

/** Workers that draw the page's columns. */
export interface Crew {
  /**
   * Runs a task. A newer task of the same `key` takes the place of one that waits and cancels one that
   * runs; those answer `cancelled`. Where a worker dies, its task answers in words and another worker
   * takes its place.
   */
  ask<T extends Task>(key: string, task: T, tell?: FitProgressTold): Promise<Outcome<TaskResult<T>>>;
  /** Takes back what waits or runs under a key; it answers `cancelled`. */
  cancel(key: string): void;
  /** Files that tasks refer to by their key. */
  setData(data: DataFiles): void;
}

interface Member {
  remote: Comlink.Remote<PageWorker>;
  dead: Promise<never>;
  busyWith?: string;
  dataKey?: string;
}

interface Waiting {
  readonly key: string;
  readonly task: Task;
  readonly tell: FitProgressTold;
  readonly answer: (outcome: Outcome<never>) => void;
}

/** A crew of `count` workers, each started when it is first needed. */
export function makeCrew(count: number, startWorker: () => Worker): Crew {
  const members: Member[] = [];
  let waiting: Waiting[] = [];
  let data: DataFiles | undefined;

  const hire = (): Member => {
    const thread = startWorker();
    const dead = new Promise<never>((_, reject) => {
      thread.onerror = (event) => reject(new Error(event.message || 'a worker of the page ended unexpectedly'));
      thread.onmessageerror = () => reject(new Error('a worker of the page sent what cannot be read'));
    });
    dead.catch(() => thread.terminate());
    return { remote: Comlink.wrap<PageWorker>(thread), dead };
  };

  const free = (): Member | undefined => {
    const idle = members.find(({ busyWith }) => busyWith === undefined);
    if (idle || members.length >= count) return idle;
    const member = hire();
    members.push(member);
    return member;
  };

  const next = (): void => {
    for (;;) {
      if (waiting.length === 0) return;
      const member = free();
      if (!member) return;
      const [first, ...rest] = waiting;
      waiting = rest;
      void perform(member, first);
    }
  };

  const perform = async (member: Member, { key, task, tell, answer }: Waiting): Promise<void> => {
    member.busyWith = key;
    try {
      // What the page holds may change while a worker takes it in.
      const sent = data;
      if (sent && task.dataKey === sent.key && member.dataKey !== sent.key) {
        const taken = (await Promise.race([member.remote.setData(sent), member.dead])) as Outcome<null>;
        member.dataKey = 'value' in taken ? sent.key : undefined;
        if (!('value' in taken)) {
          answer(taken as Outcome<never>);
          return;
        }
      }
      if (member.dataKey !== task.dataKey) {
        answer({ cancelled: true });
        return;
      }
      answer((await Promise.race([member.remote.run(task, Comlink.proxy(tell)), member.dead])) as Outcome<never>);
    } catch (error) {
      members.splice(members.indexOf(member), 1);
      answer({ trouble: { reason: error instanceof Error ? error.message : String(error), isInput: false } });
    } finally {
      member.busyWith = undefined;
      next();
    }
  };

  const takeBack = (key: string): void => {
    for (const old of waiting) if (old.key === key) old.answer({ cancelled: true });
    waiting = waiting.filter((old) => old.key !== key);
    for (const member of members) if (member.busyWith === key) void member.remote.cancel();
  };

  return {
    ask: (key, task, tell = () => undefined) =>
      new Promise((resolve) => {
        takeBack(key);
        waiting.push({ key, task, tell, answer: resolve as Waiting['answer'] });
        next();
      }),
    cancel: takeBack,
    setData: (given) => {
      data = given;
    },
  };
}

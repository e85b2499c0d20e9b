import { createEngineThread, type EngineThread } from "#app/services/engine-thread.server.ts";
import { log } from "#app/services/log.server.ts";

/** Work that no request waits for, one job at a time: the engine has one thread. */
export interface Background {
  engine: EngineThread;
  /**
   * Queues a job under a key; a key that waits or runs already is not queued again. Files that are
   * being taken in go before fits that are looked at again: a person watches them.
   *
   * @returns settles when this job has ended, however it ended
   */
  add(key: string, job: () => Promise<void>, order?: "first" | "last"): Promise<void>;
  /** Settles when the job under this key has ended; at once where there is none. */
  ended(key: string): Promise<void>;
  /** Settles when nothing waits or runs. */
  settled(): Promise<void>;
  /** Drops what waits, ends the thread and waits for the job under way; later jobs are refused. */
  close(): Promise<void>;
}

interface Job {
  key: string;
  run: () => Promise<void>;
  ended: Promise<void>;
  end: () => void;
}

/**
 * @param onFailure  told of a job that threw: what failed stays as it is and is tried again when
 *   the application resumes its work
 */
export function createBackground(onFailure: (key: string, error: unknown) => void): Background {
  const engine = createEngineThread();
  const first: Job[] = [];
  const last: Job[] = [];
  const known = new Map<string, Job>();
  let running: Job | null = null;
  let isClosed = false;

  function finish(job: Job): void {
    known.delete(job.key);
    job.end();
  }

  async function work(): Promise<void> {
    if (running) return;
    for (let job = first.shift() ?? last.shift(); job; job = first.shift() ?? last.shift()) {
      running = job;
      try {
        await job.run();
      } catch (error) {
        if (!isClosed) onFailure(job.key, error);
      }
      running = null;
      finish(job);
    }
  }

  return {
    engine,
    add: (key, run, order = "last") => {
      const same = known.get(key);
      if (same) return same.ended;
      if (isClosed) return Promise.resolve();
      let end = () => {};
      const ended = new Promise<void>((resolve) => {
        end = resolve;
      });
      const job = { key, run, ended, end };
      known.set(key, job);
      (order === "first" ? first : last).push(job);
      void work();
      return ended;
    },
    ended: (key) => known.get(key)?.ended ?? Promise.resolve(),
    settled: async () => {
      while (known.size > 0) await Promise.all([...known.values()].map((job) => job.ended));
    },
    close: async () => {
      isClosed = true;
      for (const job of [...first.splice(0), ...last.splice(0)]) finish(job);
      const underWay = running?.ended;
      await engine.close();
      await underWay;
    },
  };
}

/** The one of this process. */
export const background = createBackground((key, error) => {
  log.error({ err: error, key }, "Background work failed and will be tried again");
});

import { Worker } from 'node:worker_threads';
import pLimit from 'p-limit';
import type { JobPorts } from './screen-options.js';

/** What a worker thread is sent: the brief only where it is another one than that of the question before. */
export type ThreadMessage<Brief, Question> = { readonly brief?: Brief; readonly question: Question };

/** Threads that answer questions, each one at a time. */
export type WorkerThreads<Brief, Question, Answer> = {
  /** @param brief what the question is about; a thread keeps the latest one */
  readonly ask: (brief: Brief, question: Question) => Promise<Answer>;
};

/** A thread, what it died of, if it has, and what it was told last. */
type HeldThread = { readonly thread: Worker; fault: Error | undefined; brief: unknown };

/** What is kept for long outlives many collections of a small young generation, which copies it each time. */
const YOUNG_MB = 128;

/**
 * Starts threads for as long as `use` takes; they load what they need while the first question is yet to come.
 *
 * @param script what a thread runs: for each `ThreadMessage` it posts one answer
 */
export async function withWorkerThreads<Brief, Question, Answer, Result>(
  script: URL,
  count: number,
  ports: Pick<JobPorts, 'onStop'>,
  use: (threads: WorkerThreads<Brief, Question, Answer>) => Promise<Result>,
): Promise<Result> {
  const all = Array.from({ length: Math.max(1, count) }, () => startThread(script));
  const idle = [...all];
  const limit = pLimit(all.length);
  const stop = () => {
    limit.clearQueue();
    for (const { thread } of all) thread.terminate();
  };
  const forget = ports.onStop(stop);
  const ask = (brief: Brief, question: Question): Promise<Answer> =>
    limit(async () => {
      const held = idle.pop() as HeldThread;
      const isBriefed = held.brief === brief;
      held.brief = brief;
      const answer = await answerOf(held, isBriefed ? { question } : { brief, question });
      idle.push(held);
      return answer as Answer;
    });
  try {
    return await use({ ask });
  } finally {
    forget();
    stop();
  }
}

function startThread(script: URL): HeldThread {
  const thread = new Worker(script, { resourceLimits: { maxYoungGenerationSizeMb: YOUNG_MB } });
  const held: HeldThread = { thread, fault: undefined, brief: undefined };
  thread.once('error', (error) => {
    held.fault = error;
  });
  return held;
}

function answerOf({ thread, fault }: HeldThread, message: ThreadMessage<unknown, unknown>): Promise<unknown> {
  return new Promise((resolve, reject) => {
    if (fault !== undefined) {
      reject(fault);
      return;
    }
    const settle = () => {
      thread.off('message', onMessage);
      thread.off('error', onError);
      thread.off('exit', onExit);
    };
    const onMessage = (answer: unknown) => {
      settle();
      resolve(answer);
    };
    const onError = (error: Error) => {
      settle();
      reject(error);
    };
    const onExit = (status: number) => {
      settle();
      reject(new Error(`a worker thread ended with status ${status}`));
    };
    thread.on('message', onMessage);
    thread.on('error', onError);
    thread.on('exit', onExit);
    thread.postMessage(message);
  });
}

export type Timings = {
  /** Seconds by stage, to the millisecond. */
  readonly seconds: Readonly<Record<string, number>>;
  /** Ends a stage; the next one begins. */
  readonly end: (stage: string) => void;
};

/** Takes the time of the stages of a job, for `run.json`; the first one begins now. */
export function createTimings(): Timings {
  const seconds: Record<string, number> = {};
  let before = performance.now();
  return {
    seconds,
    end: (stage) => {
      const now = performance.now();
      seconds[stage] = Math.round(now - before) / 1000;
      before = now;
    },
  };
}

import { Presets, SingleBar } from 'cli-progress';

export type ProgressBar = {
  /** `fraction` from 0 to 1 within the named stage. */
  readonly show: (stage: string, fraction: number) => void;
  /** Takes the bar off the screen, so that something else can be printed. */
  readonly clear: () => void;
};

/** A bar on a terminal, for someone who waits. */
export function createProgressBar(stream: NodeJS.WritableStream): ProgressBar {
  let bar: SingleBar | undefined;
  return {
    show: (stage, fraction) => {
      const percent = Math.floor(fraction * 100);
      if (bar === undefined) {
        bar = new SingleBar(
          {
            stream,
            format: '{stage} [{bar}] {percentage} %',
            barsize: 30,
            clearOnComplete: true,
            hideCursor: true,
          },
          Presets.legacy,
        );
        bar.start(100, percent, { stage });
      } else {
        bar.update(percent, { stage });
      }
    },
    clear: () => {
      bar?.stop();
      bar = undefined;
    },
  };
}

import { Presets, SingleBar } from 'cli-progress';
import type { Progress } from '../jobs/screen-options.js';

type ProgressBar = {
  readonly show: (progress: Progress) => void;
  /** Takes the bar off the screen, so that something else can be printed. */
  readonly clear: () => void;
};

/** A bar on a terminal, for someone who waits: stage, share, time left, and what has come of it so far. */
export function createProgressBar(stream: NodeJS.WritableStream): ProgressBar {
  let bar: SingleBar | undefined;
  return {
    show: ({ stage, fraction, detail }) => {
      const thousandths = Math.floor(fraction * 1000);
      if (bar === undefined) {
        bar = new SingleBar(
          {
            stream,
            format: '{stage} [{bar}] {percentage} %, {eta_formatted} left: {detail}',
            barsize: 24,
            fps: 5,
            etaBuffer: 50,
            clearOnComplete: true,
            hideCursor: true,
          },
          Presets.legacy,
        );
        bar.start(1000, thousandths, { stage, detail });
      } else {
        bar.update(thousandths, { stage, detail });
      }
    },
    clear: () => {
      bar?.stop();
      bar = undefined;
    },
  };
}

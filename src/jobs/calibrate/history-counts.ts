/** What became of the sets of one file; `read` is the sum of the others. */
export type FileTally = {
  readonly file: string;
  read: number;
  /** In at least one pair. */
  paired: number;
  /** Sound, but without a partner in any age window that no maneuver or held-back block parts it from. */
  unpaired: number;
  /** The same set as one that was used or unpaired. */
  copies: number;
  /** Same object and epoch as another set, but other elements. */
  superseded: number;
  rejected: number;
};

export function emptyTally(file: string): FileTally {
  return { file, read: 0, paired: 0, unpaired: 0, copies: 0, superseded: 0, rejected: 0 };
}

/** The sum over all files. */
export function sumOfTallies(tallies: readonly FileTally[]): FileTally {
  const sum = emptyTally('');
  for (const tally of tallies) {
    sum.read += tally.read;
    sum.paired += tally.paired;
    sum.unpaired += tally.unpaired;
    sum.copies += tally.copies;
    sum.superseded += tally.superseded;
    sum.rejected += tally.rejected;
  }
  return sum;
}

import stringWidth from 'string-width';

/** Controls, line and paragraph separators, unpaired surrogates, and marks that turn the writing direction. */
const UNPRINTABLE = /[\p{Cc}\p{Cs}\p{Zl}\p{Zp}\u061C\u200E\u200F\u202A-\u202E\u2066-\u2069\uFEFF]/gu;
const graphemes = new Intl.Segmenter('en', { granularity: 'grapheme' });

/** Text from outside made safe for a terminal: what could move the cursor or turn the line around becomes `?`. */
export function terminalText(text: string): string {
  return text.replace(UNPRINTABLE, '?');
}

/** Columns that `text` takes on a terminal: wide letters two, combining marks none. */
function terminalWidth(text: string): number {
  return stringWidth(text);
}

/** `text` in exactly `columns` columns, left-aligned; what does not fit ends in `…`. */
export function padOrCut(text: string, columns: number): string {
  const width = terminalWidth(text);
  if (width <= columns) return text + ' '.repeat(columns - width);
  let kept = '';
  let keptWidth = 0;
  for (const { segment } of graphemes.segment(text)) {
    const segmentWidth = terminalWidth(segment);
    if (keptWidth + segmentWidth > columns - 1) break;
    kept += segment;
    keptWidth += segmentWidth;
  }
  return `${kept}…${' '.repeat(columns - 1 - keptWidth)}`;
}

/** `text` broken at blanks into lines of at most `columns` columns; a longer word has a line of its own. */
export function wrapWords(text: string, columns: number): string[] {
  const lines: string[] = [];
  for (const word of text.split(' ')) {
    const last = lines.at(-1);
    if (last !== undefined && terminalWidth(last) + 1 + terminalWidth(word) <= columns)
      lines[lines.length - 1] = `${last} ${word}`;
    else lines.push(word);
  }
  return lines;
}

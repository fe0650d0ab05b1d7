const WIDTH = 120;

/**
 * Any text as lines of printable ASCII that stay readable: `\\` is a backslash, `\uXXXX` any other
 * UTF-16 code unit, and a line that ends in a lone `\` goes on in the next. No line is longer than
 * 120 characters or ends in a blank.
 */
export function escapeLines(text: string): string[] {
  return text.split('\n').flatMap((line) => {
    const pieces: string[] = [];
    let piece = '';
    for (let i = 0; i < line.length; i++) {
      const escaped = escapeUnit(line[i], i === line.length - 1);
      if (piece.length + escaped.length > WIDTH - 1) {
        pieces.push(`${piece}\\`);
        piece = '';
      }
      piece += escaped;
    }
    pieces.push(piece);
    return pieces;
  });
}

function escapeUnit(unit: string, isLast: boolean): string {
  if (unit === '\\') return '\\\\';
  if (unit === ' ' && isLast) return '\\u0020';
  if (/[ -~]/.test(unit)) return unit;
  return `\\u${unit.charCodeAt(0).toString(16).padStart(4, '0')}`;
}

/** The text that `escapeLines` turned into lines, or undefined where they are none of its making. */
export function unescapeLines(lines: readonly string[]): string | undefined {
  let text = '';
  let isContinued = true;
  for (const line of lines) {
    if (!isContinued) text += '\n';
    if (!/^(?:[^\\]|\\\\|\\u[0-9a-f]{4})*\\?$/.test(line)) return undefined;
    isContinued = /^(?:[^\\]|\\\\|\\u[0-9a-f]{4})*\\$/.test(line);
    const body = isContinued ? line.slice(0, -1) : line;
    text += body.replace(/\\(?:\\|u([0-9a-f]{4}))/g, (_, hex: string | undefined) =>
      hex === undefined ? '\\' : String.fromCharCode(parseInt(hex, 16)),
    );
  }
  return isContinued ? undefined : text;
}

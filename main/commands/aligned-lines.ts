/** Rows under a head as lines of a terminal, columns as wide as their widest cell; those in `right` are set to the right. */
export function alignedLines(
  head: readonly string[],
  rows: readonly (readonly string[])[],
  right: readonly number[] = [],
): string[] {
  const widths = head.map((title, i) => Math.max(title.length, ...rows.map((row) => row[i]!.length)));
  return [head, ...rows].map((row) => {
    const cells = row.map((cell, i) => (right.includes(i) ? cell.padStart(widths[i]!) : cell.padEnd(widths[i]!)));
    return `  ${cells.join('  ')}`.trimEnd();
  });
}

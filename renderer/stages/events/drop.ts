import type { Bridge } from '../../../main/bridge';

/** Paths of what was dropped; a browser knows none and counts its files as nameless. */
export function dropPaths(data: DataTransfer | null, bridge: Bridge): { paths: string[]; nameless: number } {
  const files = [...(data?.files ?? [])];
  const paths = files.map((file) => bridge.pathOf(file));
  const known = paths.filter((path): path is string => path !== null);
  const text = data?.getData('text/plain') ?? '';
  const lines = text.split('\n').map((line) => line.trim());
  const typed = lines.filter((line) => /^([/\\~]|[A-Za-z]:)/.test(line));
  return { paths: [...known, ...typed], nameless: files.length - known.length };
}

/** Paths as the page handles them: texts that the main side made, never resolved here. */
export function joinPath(folder: string, name: string, separator: string): string {
  return folder.endsWith(separator) ? folder + name : folder + separator + name;
}

export function baseName(path: string): string {
  return path.split(/[/\\]/).at(-1) ?? path;
}

export function parentOf(path: string): string {
  return path.replace(/[/\\][^/\\]*$/, '') || path;
}

import { basename } from 'node:path';
import type { BrowserWindow, Dialog, FileFilter } from 'electron';
import type { Checked, PlaceKind } from '../bridge';

const EVENTS: FileFilter[] = [
  {
    name: 'Event files',
    extensions: [
      'csv',
      'tsv',
      'txt',
      'dat',
      'gz',
      'zst',
      'parquet',
      'ndjson',
      'jsonl',
      'h5',
      'hdf5',
      'arrow',
      'feather',
      'npy',
      'npz',
    ],
  },
  { name: 'All files', extensions: ['*'] },
];
const STUDIES: FileFilter[] = [{ name: 'Studies', extensions: ['json'] }];
const PLACES: Record<PlaceKind, FileFilter[]> = {
  study: STUDIES,
  bundle: [],
  figure: [
    { name: 'PNG picture', extensions: ['png'] },
    { name: 'SVG drawing', extensions: ['svg'] },
  ],
  text: [{ name: 'Table', extensions: ['csv', 'tsv', 'txt'] }],
  report: [{ name: 'Report', extensions: ['html', 'pdf'] }],
  converted: [],
};

/** The system's own dialog; `null` where the user closed it. */
export async function nativeDialog(
  dialog: Dialog,
  window: BrowserWindow,
  argument: Checked<'dialog'>,
): Promise<string[] | null> {
  const at = argument.suggested === undefined ? {} : { defaultPath: argument.suggested };
  if (argument.for === 'save') {
    const filters = placeFilters(argument.place ?? 'text', argument.suggested);
    const { canceled, filePath } = await dialog.showSaveDialog(window, { ...at, filters });
    return canceled || !filePath ? null : [filePath];
  }
  const { canceled, filePaths } = await dialog.showOpenDialog(window, { ...at, ...openOptions(argument.for) });
  return canceled || filePaths.length === 0 ? null : filePaths;
}

function openOptions(what: 'events' | 'study' | 'bundle') {
  if (what === 'events') return { filters: EVENTS, properties: ['openFile' as const, 'multiSelections' as const] };
  if (what === 'study') return { filters: STUDIES, properties: ['openFile' as const] };
  return { properties: ['openDirectory' as const] };
}

/** The filter that fits the suggested name stands first: the system adds its ending. */
function placeFilters(kind: PlaceKind, suggested: string | undefined): FileFilter[] {
  const ending = /\.([^.]+)$/.exec(basename(suggested ?? ''))?.[1];
  const fits = ({ extensions }: FileFilter): boolean => ending !== undefined && extensions.includes(ending);
  return [...PLACES[kind]].sort((a, b) => Number(fits(b)) - Number(fits(a)));
}

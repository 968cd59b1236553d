import type { MenuItemConstructorOptions } from 'electron';
import type { MenuCommand } from '../bridge';

type Tell = (command: MenuCommand['command']) => void;

/** The menus, with the usual shortcuts of each system. What they do, the page does. */
export function windowMenu(platform: NodeJS.Platform, isPackaged: boolean, tell: Tell): MenuItemConstructorOptions[] {
  const isMac = platform === 'darwin';
  const item = (label: string, command: MenuCommand['command'], accelerator?: string): MenuItemConstructorOptions => ({
    label,
    click: () => tell(command),
    ...(accelerator !== undefined && { accelerator }),
  });
  // The page undoes edits of the study and, in a field, those of its text: it must see the keys itself.
  const seenByPage = (entry: MenuItemConstructorOptions): MenuItemConstructorOptions => ({
    ...entry,
    registerAccelerator: false,
  });
  return [
    ...(isMac ? [applicationMenu(item)] : []),
    {
      label: '&File',
      submenu: [
        item('New study', 'new', 'CmdOrCtrl+N'),
        item('Open study...', 'open', 'CmdOrCtrl+O'),
        item('Add event files...', 'open-events', 'CmdOrCtrl+Shift+O'),
        { type: 'separator' },
        item('Save', 'save', 'CmdOrCtrl+S'),
        item('Save as...', 'save-as', 'CmdOrCtrl+Shift+S'),
        { type: 'separator' },
        isMac ? { role: 'close' } : { role: 'quit' },
      ],
    },
    {
      label: '&Edit',
      submenu: [
        seenByPage(item('Undo', 'undo', 'CmdOrCtrl+Z')),
        seenByPage(item('Redo', 'redo', isMac ? 'Cmd+Shift+Z' : 'Ctrl+Y')),
        { type: 'separator' },
        { role: 'cut' },
        { role: 'copy' },
        { role: 'paste' },
        { role: 'selectAll' },
      ],
    },
    {
      label: '&Stage',
      submenu: [
        item('Events', 'stage-1', 'CmdOrCtrl+1'),
        item('Axes', 'stage-2', 'CmdOrCtrl+2'),
        item('Matrix', 'stage-3', 'CmdOrCtrl+3'),
        item('Audit', 'stage-4', 'CmdOrCtrl+4'),
        item('Hand over', 'stage-5', 'CmdOrCtrl+5'),
      ],
    },
    {
      label: '&View',
      submenu: [
        { role: 'resetZoom' },
        { role: 'zoomIn' },
        { role: 'zoomOut' },
        { type: 'separator' },
        { role: 'togglefullscreen' },
        ...(isPackaged ? [] : [{ role: 'toggleDevTools' } satisfies MenuItemConstructorOptions]),
      ],
    },
    ...(isMac ? [{ role: 'windowMenu' } satisfies MenuItemConstructorOptions] : []),
    {
      label: '&Help',
      role: 'help',
      submenu: [item('Shortcuts', 'shortcuts', isMac ? 'Cmd+/' : 'F1'), item('About Entasis', 'about')],
    },
  ];
}

function applicationMenu(
  item: (label: string, command: MenuCommand['command']) => MenuItemConstructorOptions,
): MenuItemConstructorOptions {
  return {
    role: 'appMenu',
    submenu: [
      item('About Entasis', 'about'),
      { type: 'separator' },
      { role: 'hide' },
      { role: 'hideOthers' },
      { role: 'unhide' },
      { type: 'separator' },
      { role: 'quit' },
    ],
  };
}

import {
  app,
  BrowserWindow,
  dialog,
  ipcMain,
  Menu,
  nativeTheme,
  protocol,
  screen,
  session as sessions,
  shell,
} from 'electron';
import { join, resolve } from 'node:path';
import { CALL, DROP, NOTICE } from './electron/channels';
import { keepsakesFolder } from './session/keepsakes';
import { denyPermissions, isOwnPage, lockPage } from './electron/locked-page';
import { nativeDialog } from './electron/native-dialog';
import { PAGE, PRIVILEGES, servePage } from './electron/page-scheme';
import { printInWindow } from './electron/print-window';
import { Session } from './session';
import { windowFilesBeside } from './window-files';
import { windowMenu } from './electron/window-menu';
import { keepWindowState, LEAST, readWindowState } from './electron/window-state';

/** Paper and ink of the page, so that the frame does not flash before the page is drawn. */
const PAPER = { light: '#faf8f3', dark: '#1b1c1e' };

const files = windowFilesBeside(import.meta.url);
const statePath = join(keepsakesFolder(), 'window.json');
let open: { window: BrowserWindow; session: Session } | null = null;
/** A study that the system asked for before there was a window. */
let wanted = studyIn(process.argv);

protocol.registerSchemesAsPrivileged(PRIVILEGES);
if (app.requestSingleInstanceLock()) start();
else app.quit();

function start(): void {
  app.enableSandbox();
  app.on('second-instance', (_event, argv, folder) => show(studyIn(argv, folder)));
  app.on('open-file', (event, path) => {
    event.preventDefault();
    show(path);
  });
  app.on('window-all-closed', () => {
    if (process.platform !== 'darwin') app.quit();
  });
  app.on('activate', () => show(null));
  void app.whenReady().then(async () => {
    denyPermissions(sessions.defaultSession);
    await servePage(protocol, files.renderer);
    ipcMain.handle(CALL, (event, name: unknown, argument: unknown) => {
      const from = open;
      if (!from || !isOwnPage(event, from.window.webContents)) throw new Error('not a call of the window');
      return from.session.call(String(name), argument);
    });
    ipcMain.on(DROP, (event, path: unknown) => {
      const isOurs = open !== null && isOwnPage(event, open.window.webContents);
      event.returnValue = isOurs && typeof path === 'string' && open!.session.drop(path);
    });
    openWindow();
  });
}

/** The study among a program's arguments: the one that ends like one. */
function studyIn(argv: readonly string[], folder = process.cwd()): string | null {
  const path = argv.slice(1).find((argument) => /\.json$/i.test(argument) && !argument.startsWith('-'));
  return path === undefined ? null : resolve(folder, path);
}

/** Brings the window to the front, and opens the study in it. */
function show(study: string | null): void {
  if (!app.isReady()) {
    wanted = study ?? wanted;
    return;
  }
  if (!open) {
    wanted = study;
    openWindow();
    return;
  }
  if (open.window.isMinimized()) open.window.restore();
  open.window.focus();
  if (study !== null && open.session.drop(study)) open.session.tell({ kind: 'open', path: study });
}

function openWindow(): void {
  const { maximised, ...place } = readWindowState(
    statePath,
    screen.getAllDisplays().map(({ workArea }) => workArea),
  );
  const window = new BrowserWindow({
    ...place,
    minWidth: LEAST.width,
    minHeight: LEAST.height,
    title: 'Entasis',
    backgroundColor: nativeTheme.shouldUseDarkColors ? PAPER.dark : PAPER.light,
    show: false,
    webPreferences: {
      preload: files.preload,
      contextIsolation: true,
      sandbox: true,
      nodeIntegration: false,
      nodeIntegrationInWorker: false,
      nodeIntegrationInSubFrames: false,
      webSecurity: true,
      webviewTag: false,
      navigateOnDragDrop: false,
      spellcheck: false,
      devTools: !app.isPackaged,
    },
  });
  if (maximised) window.maximize();
  lockPage(window.webContents);
  const session = new Session({
    transport: 'desktop',
    workerFiles: files.workerFiles,
    demonstration: files.demonstration,
    open: wanted,
    desktop: {
      dialog: (argument) => nativeDialog(dialog, window, argument),
      reveal: (path) => shell.showItemInFolder(path),
      setTitle: (title, edited) => setTitle(window, title, edited),
      print: printInWindow,
    },
  });
  wanted = null;
  open = { window, session };
  session.listen((notice) => {
    if (!window.isDestroyed()) window.webContents.send(NOTICE, notice);
  });
  Menu.setApplicationMenu(
    Menu.buildFromTemplate(
      windowMenu(process.platform, app.isPackaged, (command) => session.tell({ kind: 'command', command })),
    ),
  );
  window.once('ready-to-show', () => window.show());
  window.on('close', () => {
    keepWindowState(statePath, { ...window.getNormalBounds(), maximised: window.isMaximized() });
  });
  window.on('closed', () => {
    open = null;
    void session.close();
  });
  void window.loadURL(PAGE);
}

function setTitle(window: BrowserWindow, title: string, edited: boolean): void {
  window.setTitle(`${title}${edited ? ' (edited)' : ''} - Entasis`);
  window.setDocumentEdited(edited);
}

import { EventEmitter } from 'node:events';
import { mkdtempSync, readFileSync, rmSync, writeFileSync } from 'node:fs';
import { tmpdir } from 'node:os';
import { join } from 'node:path';
import { deserialize, serialize } from 'node:v8';
import { afterAll, beforeAll, describe, expect, it, vi } from 'vitest';
import type { Answer, Bridge, Notice, StartFacts } from '../../main/bridge';

/** What crosses between the processes of Electron is cloned; shared memory and functions do not pass. */
function cloned<T>(value: T): T {
  refuseShared(value);
  return deserialize(serialize(value)) as T;
}

function refuseShared(value: unknown): void {
  if (ArrayBuffer.isView(value)) {
    if (value.buffer instanceof SharedArrayBuffer) throw new Error('An object could not be cloned.');
  } else if (typeof value === 'object' && value !== null) Object.values(value).forEach(refuseShared);
}

const electron = vi.hoisted(() => {
  const state = {
    handlers: new Map<string, (...args: never[]) => unknown>(),
    exposed: undefined as unknown,
    windows: [] as unknown[],
    menu: undefined as unknown,
    schemes: undefined as unknown,
    scheme: undefined as ((request: Request) => Promise<Response>) | undefined,
    permissions: {} as Record<string, (...args: unknown[]) => unknown>,
    shown: [] as string[],
    dialogs: [] as unknown[],
    dropped: '/nothing',
  };
  return state;
});

vi.mock('electron', async () => {
  const { EventEmitter } = await import('node:events');
  const toRenderer = new EventEmitter();
  class FakePage extends EventEmitter {
    mainFrame = { url: 'entasis://window/' };
    openHandler: ((details: unknown) => unknown) | undefined;
    setWindowOpenHandler(handler: (details: unknown) => unknown) {
      this.openHandler = handler;
    }
    printToPDF() {
      return Promise.resolve(Buffer.from('%PDF-'));
    }
    send(channel: string, value: unknown) {
      toRenderer.emit(channel, {}, cloned(value));
    }
  }
  class FakeWindow extends EventEmitter {
    webContents = new FakePage();
    calls: string[] = [];
    title = '';
    edited = false;
    url = '';
    constructor(readonly options: { webPreferences: Record<string, unknown> }) {
      super();
      electron.windows.push(this);
    }
    loadURL(url: string) {
      this.url = url;
      return Promise.resolve();
    }
    loadFile(path: string) {
      this.url = path;
      return Promise.resolve();
    }
    destroy = () => this.calls.push('destroy');
    setTitle(title: string) {
      this.title = title;
    }
    setDocumentEdited(edited: boolean) {
      this.edited = edited;
    }
    isDestroyed = () => false;
    isMinimized = () => true;
    isMaximized = () => false;
    getNormalBounds = () => ({ x: 0, y: 0, width: 1300, height: 800 });
    restore = () => this.calls.push('restore');
    focus = () => this.calls.push('focus');
    show = () => this.calls.push('show');
    maximize = () => this.calls.push('maximize');
  }
  const app = Object.assign(new EventEmitter(), {
    isPackaged: true,
    requestSingleInstanceLock: () => true,
    enableSandbox: () => undefined,
    whenReady: () => Promise.resolve(),
    isReady: () => electron.windows.length > 0,
    quit: () => undefined,
  });
  const page = () => (electron.windows[0] as FakeWindow).webContents;
  return {
    app,
    BrowserWindow: FakeWindow,
    Menu: { setApplicationMenu: (menu: unknown) => (electron.menu = menu), buildFromTemplate: (t: unknown) => t },
    nativeTheme: { shouldUseDarkColors: true },
    screen: { getAllDisplays: () => [{ workArea: { x: 0, y: 0, width: 1920, height: 1080 } }] },
    shell: { showItemInFolder: (path: string) => electron.shown.push(path) },
    dialog: {
      showOpenDialog: (_window: unknown, options: unknown) =>
        Promise.resolve(electron.dialogs.push(options) && dialogAnswer()),
      showSaveDialog: (_window: unknown, options: unknown) =>
        Promise.resolve(electron.dialogs.push(options) && dialogAnswer()),
    },
    protocol: {
      registerSchemesAsPrivileged: (schemes: unknown) => (electron.schemes = schemes),
      handle: (_scheme: string, handler: (request: Request) => Promise<Response>) => (electron.scheme = handler),
    },
    session: {
      defaultSession: Object.assign(new EventEmitter(), {
        setPermissionRequestHandler: (f: never) => (electron.permissions['request'] = f),
        setPermissionCheckHandler: (f: never) => (electron.permissions['check'] = f),
        setDevicePermissionHandler: (f: never) => (electron.permissions['device'] = f),
      }),
    },
    ipcMain: {
      handle: (channel: string, handler: never) => electron.handlers.set(channel, handler),
      on: (channel: string, handler: never) => electron.handlers.set(channel, handler),
    },
    ipcRenderer: {
      on: (channel: string, listener: (...args: unknown[]) => void) => toRenderer.on(channel, listener),
      async invoke(channel: string, ...args: unknown[]) {
        const event = { sender: page(), senderFrame: page().mainFrame };
        // As Electron does, an error thrown by the handler arrives as its message alone.
        try {
          return cloned(await electron.handlers.get(channel)!(event as never, ...(cloned(args) as never[])));
        } catch (error) {
          // eslint-disable-next-line preserve-caught-error -- its class and cause are what does not cross
          throw new Error(`Error invoking remote method '${channel}': ${String(error)}`);
        }
      },
      sendSync(channel: string, ...args: unknown[]) {
        const event = { sender: page(), senderFrame: page().mainFrame, returnValue: undefined as unknown };
        electron.handlers.get(channel)!(event as never, ...(cloned(args) as never[]));
        return cloned(event.returnValue);
      },
    },
    contextBridge: { exposeInMainWorld: (_name: string, value: unknown) => (electron.exposed = value) },
    webUtils: { getPathForFile: () => electron.dropped },
  };
});

let folder: string;
let answer: { canceled: boolean; filePath?: string; filePaths?: string[] } = { canceled: true };
const dialogAnswer = () => answer;

interface OpenWindow extends EventEmitter {
  options: { webPreferences: Record<string, unknown> };
  webContents: EventEmitter & { openHandler: (details: unknown) => unknown; mainFrame: { url: string } };
  calls: string[];
  title: string;
  edited: boolean;
  url: string;
}
const window = () => electron.windows[0] as OpenWindow;
const bridge = () => electron.exposed as Bridge;
const valueOf = <T>(answered: Answer<T>): T => {
  if (!answered.ok) throw new Error(answered.what);
  return answered.value;
};

beforeAll(async () => {
  folder = mkdtempSync(join(tmpdir(), 'entasis-desktop-'));
  process.env['XDG_STATE_HOME'] = folder;
  writeFileSync(join(folder, 'events.csv'), 'e_true,e_reco\n1,2\n');
  vi.doMock('../../main/window-files', () => ({
    windowFilesBeside: () => ({
      workerFiles: {},
      renderer: join(folder, 'renderer'),
      preload: '/out/preload/preload.cjs',
      demonstration: join(folder, 'none'),
    }),
  }));
  const { mkdirSync } = await import('node:fs');
  mkdirSync(join(folder, 'renderer'));
  writeFileSync(join(folder, 'renderer', 'index.html'), '<title>Entasis</title>');
  await import('../../main/desktop');
  await import('../../main/preload');
  await vi.waitFor(() => expect(electron.windows).toHaveLength(1));
});
afterAll(() => rmSync(folder, { recursive: true, force: true }));

describe('the page of the desktop', () => {
  it('is isolated and sandboxed, without Node, and without tools in a packaged program', () => {
    expect(window().options.webPreferences).toMatchObject({
      contextIsolation: true,
      sandbox: true,
      nodeIntegration: false,
      nodeIntegrationInWorker: false,
      nodeIntegrationInSubFrames: false,
      webSecurity: true,
      webviewTag: false,
      devTools: false,
    });
  });

  it('comes by a scheme of its own, and not from the disk', async () => {
    expect(window().url).toBe('entasis://window/');
    expect(electron.schemes).toStrictEqual([
      { scheme: 'entasis', privileges: { standard: true, secure: true, supportFetchAPI: true } },
    ]);
    const reply = await electron.scheme!(new Request('entasis://window/'));
    expect(await reply.text()).toContain('Entasis');
    expect(reply.headers.get('content-security-policy')).toContain("default-src 'none'");
  });

  it('gets nothing but its own files', async () => {
    for (const url of [
      'entasis://window/../events.csv',
      'entasis://other/index.html',
      'entasis://window/events.csv',
      'entasis://window/%2e%2e/events.csv',
    ]) {
      expect((await electron.scheme!(new Request(url))).status, url).toBe(404);
    }
    expect((await electron.scheme!(new Request('entasis://window/', { method: 'POST' }))).status).toBe(404);
  });

  it('cannot navigate, open windows or embed pages', () => {
    for (const name of ['will-navigate', 'will-redirect', 'will-attach-webview']) {
      const preventDefault = vi.fn();
      window().webContents.emit(name, { preventDefault });
      expect(preventDefault, name).toHaveBeenCalledOnce();
    }
    expect(window().webContents.openHandler({ url: 'https://example.org' })).toStrictEqual({ action: 'deny' });
  });

  it('is denied every permission but that of copying', () => {
    const asked = (permission: string) => {
      let granted: unknown;
      electron.permissions['request']!({}, permission, (given: boolean) => (granted = given));
      return granted;
    };
    for (const permission of [
      'media',
      'geolocation',
      'notifications',
      'clipboard-read',
      'openExternal',
      'fileSystem',
    ]) {
      expect(asked(permission), permission).toBe(false);
      expect(electron.permissions['check']!({}, permission)).toBe(false);
    }
    expect(asked('clipboard-sanitized-write')).toBe(true);
    expect(electron.permissions['device']!({})).toBe(false);
  });
});

describe('calls of the page', () => {
  it('are answered through the clone that Electron makes', async () => {
    const facts = valueOf<StartFacts>(await bridge().call('start', {}));
    expect(facts).toMatchObject({ transport: 'desktop', demonstration: null, open: null, draft: null });
  });

  it('tell their refusals as data: no error class has to survive', async () => {
    const refused = await bridge().call('tally', { study: 3, folder: '' } as never);
    expect(refused).toMatchObject({ ok: false, code: 'refused', where: 'tally.study' });
    expect(await bridge().call('constructor' as never, {} as never)).toMatchObject({ ok: false, what: 'no such call' });
  });

  it('may be made with reactive state, which is a proxy that no clone takes', async () => {
    const { connect } = await import('../../main/page/page-bridge');
    vi.stubGlobal('window', { entasis: bridge() });
    const page = await connect();
    vi.unstubAllGlobals();
    const argument = new Proxy({ title: 'A proxy', edited: false }, {});
    await expect(bridge().call('setTitle', argument)).rejects.toThrow();
    expect(valueOf(await page.call('setTitle', argument))).toBe(true);
    expect(page.transport).toBe('desktop');
  });

  it('carry typed arrays as they are, and no shared memory', () => {
    expect(cloned(Float64Array.of(1, NaN))).toStrictEqual(Float64Array.of(1, NaN));
    expect(() => cloned(new Float64Array(new SharedArrayBuffer(8)))).toThrow();
  });

  it('of any other page or frame are refused', async () => {
    const call = electron.handlers.get('entasis:call') as unknown as (...args: unknown[]) => Promise<unknown>;
    const { webContents } = window();
    const frame = { url: 'entasis://window/' };
    const elsewhere = [
      { sender: {}, senderFrame: webContents.mainFrame },
      { sender: webContents, senderFrame: frame },
      { sender: webContents, senderFrame: null },
    ];
    for (const event of elsewhere) expect(() => call(event, 'start', {})).toThrow('not a call of the window');
    const url = webContents.mainFrame.url;
    webContents.mainFrame.url = 'https://example.org/';
    expect(() => call({ sender: webContents, senderFrame: webContents.mainFrame }, 'start', {})).toThrow('not a call');
    webContents.mainFrame.url = url;
  });

  it('reach the title of the frame', async () => {
    await bridge().call('setTitle', { title: 'Tagged photons', edited: true });
    expect([window().title, window().edited]).toStrictEqual(['Tagged photons (edited) - Entasis', true]);
  });
});

describe('files', () => {
  it('chosen in the system dialog may be read, and are only then', async () => {
    const path = join(folder, 'events.csv');
    const inspect = () => bridge().call('readRows', { path, from: 0, count: 1 });
    expect(await inspect()).toMatchObject({ ok: false, code: 'refused' });
    answer = { canceled: true };
    expect(valueOf(await bridge().call('dialog', { for: 'events' }))).toBeNull();
    answer = { canceled: false, filePaths: [path] };
    expect(valueOf(await bridge().call('dialog', { for: 'events' }))).toStrictEqual({ paths: [path] });
    expect(await inspect()).toMatchObject({ ok: false, code: 'not-read' });
  });

  it('saved through the system dialog are written where it said', async () => {
    const path = join(folder, 'figure.png');
    answer = { canceled: false, filePath: path };
    await bridge().call('dialog', { for: 'save', place: 'figure', suggested: 'figure.png' });
    const saved = valueOf(await bridge().call('saveFile', { path, data: Uint8Array.of(1, 2, 3), replace: false }));
    expect(saved.files).toMatchObject([{ path, bytes: 3 }]);
  });

  it('dropped on the window have a path and are chosen; what the page makes up is not', () => {
    electron.dropped = join(folder, 'events.csv');
    expect(bridge().pathOf({} as File)).toBe(electron.dropped);
    electron.dropped = '';
    expect(bridge().pathOf({} as File)).toBeNull();
    electron.dropped = join(folder, 'none.csv');
    expect(bridge().pathOf({} as File)).toBeNull();
  });

  it('can be shown in the file manager', async () => {
    await bridge().call('reveal', { path: join(folder, 'events.csv') });
    expect(electron.shown).toStrictEqual([join(folder, 'events.csv')]);
  });
});

describe('a report', () => {
  it('is printed in a window of its own that runs no script, is not seen and is gone afterwards', async () => {
    const { printInWindow } = await import('../../main/electron/print-window');
    const pdf = join(folder, 'report.pdf');
    await printInWindow(join(folder, 'report.html'), pdf);
    const printing = electron.windows.pop() as OpenWindow;
    expect(printing.options).toMatchObject({ show: false, webPreferences: { javascript: false, sandbox: true } });
    expect(printing.calls).toStrictEqual(['destroy']);
    expect(readFileSync(pdf, 'utf8')).toBe('%PDF-');
  });
});

describe('menus and a second start', () => {
  interface Item {
    label?: string;
    click?: () => void;
    accelerator?: string;
    registerAccelerator?: boolean;
    submenu?: Item[];
  }
  const items = () => (electron.menu as Item[]).flatMap(({ submenu }) => submenu ?? []);

  it('tell the page what to do, by the usual keys', () => {
    const heard: Notice[] = [];
    const stop = bridge().listen((notice) => heard.push(notice));
    items().find(({ accelerator }) => accelerator === 'CmdOrCtrl+S')!.click!();
    items().find(({ label }) => label === 'Matrix')!.click!();
    stop();
    items().find(({ label }) => label === 'Save')!.click!();
    expect(heard).toStrictEqual([
      { kind: 'command', command: 'save' },
      { kind: 'command', command: 'stage-3' },
    ]);
  });

  it('leave undo and redo to the page, which knows whether a text or the study is edited', () => {
    for (const label of ['Undo', 'Redo']) {
      expect(items().find((item) => item.label === label)!.registerAccelerator).toBe(false);
    }
  });

  it('bring the one window to the front and open the study in it', async () => {
    const { app } = (await import('electron')) as unknown as { app: EventEmitter };
    const path = join(folder, 'b.study.json');
    writeFileSync(path, '{}');
    const heard: Notice[] = [];
    const stop = bridge().listen((notice) => heard.push(notice));
    app.emit('second-instance', {}, ['entasis', '--flag', 'b.study.json'], folder);
    stop();
    expect(window().calls).toStrictEqual(['restore', 'focus']);
    expect(heard).toStrictEqual([{ kind: 'open', path }]);
    expect(electron.windows).toHaveLength(1);
  });
});

import type { IpcMainEvent, IpcMainInvokeEvent, Session, WebContents } from 'electron';
import { PAGE } from './page-scheme';

/** Copying a number is the one thing a page may ask of the system. */
const PERMITTED = 'clipboard-sanitized-write';

/** Takes from a page every way out: navigation, new windows, embedded pages, permissions, devices, downloads. */
export function lockPage(page: WebContents): void {
  page.setWindowOpenHandler(() => ({ action: 'deny' }));
  page.on('will-navigate', (event) => event.preventDefault());
  page.on('will-redirect', (event) => event.preventDefault());
  page.on('will-attach-webview', (event) => event.preventDefault());
}

export function denyPermissions(session: Session): void {
  session.setPermissionRequestHandler((_page, permission, answer) => answer(permission === PERMITTED));
  session.setPermissionCheckHandler((_page, permission) => permission === PERMITTED);
  session.setDevicePermissionHandler(() => false);
  session.on('will-download', (event) => event.preventDefault());
}

/** True for a message of our own page's main frame, not of any other frame or page. */
export function isOwnPage(event: IpcMainEvent | IpcMainInvokeEvent, page: WebContents): boolean {
  const { sender, senderFrame } = event;
  return sender === page && senderFrame !== null && senderFrame === page.mainFrame && senderFrame.url.startsWith(PAGE);
}

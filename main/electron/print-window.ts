import { writeFile } from 'node:fs/promises';
import { BrowserWindow } from 'electron';
import { stopIfCancelled } from '../../src/study/input-error';
import { lockPage } from './locked-page';

/** Prints an HTML file to a PDF file in a window that is not shown and runs no script. */
export async function printInWindow(html: string, pdf: string, signal?: AbortSignal): Promise<void> {
  const webPreferences = { sandbox: true, contextIsolation: true, nodeIntegration: false, javascript: false };
  const window = new BrowserWindow({ show: false, webPreferences });
  lockPage(window.webContents);
  try {
    await window.loadFile(html);
    stopIfCancelled(signal);
    await writeFile(pdf, await window.webContents.printToPDF({ preferCSSPageSize: true, printBackground: true }));
  } finally {
    window.destroy();
  }
}

import { plain } from './number';

/**
 * Puts text on the clipboard by the copy command, which needs no permission; set numbers become plain digits.
 * Answers whether the system took it.
 */
export function copyText(text: string): boolean {
  const put = (event: ClipboardEvent) => {
    event.preventDefault();
    event.clipboardData?.setData('text/plain', plain(text));
  };
  document.addEventListener('copy', put, { once: true });
  const taken = document.execCommand('copy');
  document.removeEventListener('copy', put);
  return taken;
}

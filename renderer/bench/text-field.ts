/** Whether the focus is where text is typed: undo and redo are then the field's own. */
export function isTyping(): boolean {
  const element = document.activeElement;
  if (element instanceof HTMLTextAreaElement) return true;
  return element instanceof HTMLInputElement && !['checkbox', 'radio', 'range'].includes(element.type);
}

/** Whether a command is for the text field that has the focus: undo and redo are its own while text is typed. */
export function isForField(command: string | null): boolean {
  return (command === 'undo' || command === 'redo') && isTyping();
}

function isTyping(): boolean {
  const element = document.activeElement;
  if (element instanceof HTMLTextAreaElement) return true;
  return element instanceof HTMLInputElement && !['checkbox', 'radio', 'range'].includes(element.type);
}

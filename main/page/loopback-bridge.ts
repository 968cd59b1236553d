import type { Answer, Argument, Bridge, CallName, Notice, Refusal, Result } from '../bridge';
import { decode, encode } from './codec';

/**
 * The bridge of a page that the loopback served: calls are posts, notices one response that never ends, a line each.
 * A call that takes long is answered at once by a ticket and fetched when the notice stream says that it is done:
 * a browser opens only six connections to one host, and long jobs must not hold them.
 */
export function loopbackBridge(): Bridge {
  // The one-time key was used up by loading this page: it need not stay in the address.
  if (location.search !== '') history.replaceState(null, '', location.pathname);
  const listeners = new Set<(notice: Notice) => void>();
  const waiting = new Map<string, () => void>();
  const done = new Set<string>();
  const hear = (line: string) => {
    const notice = JSON.parse(line) as Notice | { kind: 'answered'; ticket: string } | { kind: 'alive' };
    if (notice.kind === 'alive') return;
    if (notice.kind !== 'answered') return listeners.forEach((listener) => listener(notice));
    const wake = waiting.get(notice.ticket);
    if (wake) wake();
    else done.add(notice.ticket);
  };
  const answered = (ticket: string) =>
    new Promise<void>((wake) => (done.delete(ticket) ? wake() : waiting.set(ticket, wake)));
  const notices = listenFor(hear);
  const ended = notices.ended;

  async function call<Name extends CallName>(name: Name, argument: Argument<Name>): Promise<Answer<Result<Name>>> {
    try {
      await notices.open;
      let answer = await post(`/call/${name}`, encode(argument));
      if (isTicket(answer)) {
        const { ticket } = answer;
        const gone = await Promise.race([answered(ticket), ended.then(() => true)]);
        waiting.delete(ticket);
        if (gone === true) return GONE;
        answer = await post(`/answer/${ticket}`);
      }
      return answer as Answer<Result<Name>>;
    } catch {
      return GONE;
    }
  }
  return {
    transport: 'loopback',
    call,
    listen: (listener) => (listeners.add(listener), () => void listeners.delete(listener)),
    pathOf: () => null,
    ended,
  };
}

const GONE: Refusal = {
  ok: false,
  code: 'fault',
  where: 'window',
  what: 'the program behind this window does not answer',
  remedy: 'start it again; edits up to the last draft are kept',
};

function isTicket(answer: unknown): answer is { ticket: string } {
  return typeof answer === 'object' && answer !== null && 'ticket' in answer;
}

async function post(path: string, body?: Uint8Array<ArrayBuffer>): Promise<unknown> {
  const response = await fetch(path, {
    method: 'POST',
    headers: { 'content-type': 'application/octet-stream' },
    ...(body && { body }),
  });
  if (!response.ok) throw new Error(`${path}: ${response.status}`);
  return decode(new Uint8Array(await response.arrayBuffer()));
}

/** Opens the stream of notices: `open` resolves with its first byte, `ended` when it breaks. */
function listenFor(hear: (line: string) => void): { open: Promise<void>; ended: Promise<void> } {
  const response = fetch('/notices', { method: 'POST' });
  const open = response.then((answer) => {
    if (!answer.ok) throw new Error(`/notices: ${answer.status}`);
  });
  const ended = response.then((answer) => eachLine(answer.body!, hear)).catch(() => undefined);
  open.catch(() => undefined);
  return { open, ended };
}

async function eachLine(body: ReadableStream<Uint8Array>, hear: (line: string) => void): Promise<void> {
  const decoder = new TextDecoder();
  let rest = '';
  for (const reader = body.getReader(); ;) {
    const { done, value } = await reader.read();
    if (done) return;
    const lines = (rest + decoder.decode(value, { stream: true })).split('\n');
    rest = lines.pop()!;
    lines.filter((line) => line !== '').forEach(hear);
  }
}

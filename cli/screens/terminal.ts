/**
 * The terminal as a guest leaves it: alternate screen, raw keys and bracketed paste on the way in, and everything back as
 * it was on every way out, whatever ended the program.
 */

const enterCodes = "\u001b[?1049h\u001b[?25l\u001b[?2004h";
const leaveCodes = "\u001b[?2026l\u001b[?2004l\u001b[?25h\u001b[0m\u001b[?1049l";

export interface TerminalStreams {
  stdin: NodeJS.ReadStream;
  stdout: NodeJS.WriteStream;
}

export interface TerminalEvents {
  /** The program is to end, with this exit code. */
  onEnd(code: number): void;
  /** A fault nobody caught; the terminal is restored already. */
  onCrash(error: unknown): void;
  /** Back from having been stopped: the screen is not what it was. */
  onContinue(): void;
  onData(chunk: Buffer): void;
  onResize(): void;
}

export interface Terminal {
  leave(): void;
  suspend(): void;
}

/** Takes the terminal. `leave` may be called any number of times. */
export function takeTerminal(io: TerminalStreams, events: TerminalEvents): Terminal {
  const { stdin, stdout } = io;
  let inside = false;
  const write = (text: string) => {
    // The terminal may be gone (closed window); there is nobody left to tell.
    if (stdout.writable) stdout.write(text);
  };
  const enter = () => {
    if (inside) return;
    inside = true;
    if (stdin.isTTY) stdin.setRawMode(true);
    stdin.resume();
    write(enterCodes);
  };
  const giveBack = () => {
    if (!inside) return;
    inside = false;
    write(leaveCodes);
    if (stdin.isTTY) stdin.setRawMode(false);
  };
  const leave = () => {
    giveBack();
    stdin.pause();
  };
  const endWith = (code: number) => () => {
    leave();
    events.onEnd(code);
  };
  const crash = (error: unknown) => {
    leave();
    events.onCrash(error);
  };
  const goOn = () => {
    enter();
    events.onContinue();
  };
  const suspend = () => {
    // The keyboard stays open: with nothing to wait for, the program would end on coming back instead of going on.
    giveBack();
    process.kill(process.pid, "SIGSTOP");
  };
  const gone = (error: NodeJS.ErrnoException) => {
    // Nobody reads any more: end quietly, as after a hang-up.
    inside = false;
    events.onEnd(error.code === "EPIPE" || error.code === "EIO" ? 0 : 1);
  };
  const signals: [NodeJS.Signals, () => void][] = [
    ["SIGINT", endWith(130)],
    ["SIGTERM", endWith(143)],
    ["SIGHUP", endWith(129)],
    ["SIGTSTP", suspend],
    ["SIGCONT", goOn],
  ];
  const onExit = () => leave();
  const detach = () => {
    for (const [signal, call] of signals) process.off(signal, call);
    process.off("uncaughtException", crash);
    process.off("unhandledRejection", crash);
    process.off("exit", onExit);
    stdin.off("data", events.onData);
    stdin.off("end", hangUp);
    stdout.off("resize", events.onResize);
    // The error listener stays: a late EPIPE must not become an uncaught exception.
  };
  const hangUp = endWith(129);
  for (const [signal, call] of signals) process.on(signal, call);
  process.on("uncaughtException", crash);
  process.on("unhandledRejection", crash);
  process.on("exit", onExit);
  stdin.on("data", events.onData);
  stdin.on("end", hangUp);
  stdout.on("resize", events.onResize);
  stdout.on("error", gone);
  enter();
  return {
    leave() {
      leave();
      // Not at once: the layout library listens for signals as well, and ends the process if it is the only one left.
      setImmediate(detach);
    },
    suspend,
  };
}

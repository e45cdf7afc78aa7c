/**
 * Opens the screens on a desk: wires terminal, keys, store, painter together and resolves with the exit code.
 */
import { PassThrough } from "node:stream";
import { render } from "ink";
import { decideLook } from "../palette.ts";
import { App } from "./app.tsx";
import { noteCrash } from "./crash.ts";
import type { ScreenDesk } from "./desk.ts";
import { KeyReader } from "./keyboard.ts";
import { perform } from "./perform.ts";
import { RowSlots } from "./row-slots.ts";
import { type Effect, startState } from "./state.ts";
import { Store } from "./store.ts";
import { takeTerminal } from "./terminal.ts";
import { FrameWriter } from "./writer.ts";

export interface ScreenStreams {
  stdin: NodeJS.ReadStream;
  stdout: NodeJS.WriteStream;
  env: Readonly<Record<string, string | undefined>>;
  /** `--no-color` / `--color=always`, `--ascii`. */
  colour?: "never" | "always";
  ascii?: boolean;
  /** Where a last word goes after a crash; the standard error stream unless given. */
  say?: (text: string) => void;
}

/** How long a lone escape may still become a sequence, milliseconds. Longer is felt; shorter breaks slow lines. */
const escapeWait = 50;

/** Runs the screens until they are left; resolves with the exit code (0; 130, 143, 129 after signals; 1 after a crash). */
export function openScreens(desk: ScreenDesk, io: ScreenStreams): Promise<number> {
  const decided = decideLook({ env: io.env, isTTY: io.stdout.isTTY === true, flag: io.colour, ascii: io.ascii });
  const look = decided.colour === "none" ? { ...decided, colour: "mono" as const } : decided;
  const slots = new RowSlots();
  const writer = new FrameWriter(io.stdout, (frame) => slots.expand(frame));
  const keys = new KeyReader();
  return new Promise((resolve) => {
    let ended = false;
    let escapeTimer: NodeJS.Timeout | null = null;
    const store = new Store(startState(writer.columns, writer.rows), (effect: Effect) => {
      void perform(desk, effect, store.dispatch, (what) => {
        if (what === "leave") end(0);
        else if (what === "repaint") writer.repaint();
        else terminal.suspend();
      });
    });
    const end = (code: number, afterwards?: string) => {
      // A second signal while the first is being dealt with: at once.
      if (ended) process.exit(code);
      ended = true;
      if (escapeTimer !== null) clearTimeout(escapeTimer);
      writer.shut();
      terminal.leave();
      ink.unmount();
      if (afterwards !== undefined) (io.say ?? ((text) => process.stderr.write(text)))(`${afterwards}\n`);
      resolve(code);
    };
    const resized = () => {
      writer.resized();
      store.dispatch({ kind: "size", columns: writer.columns, rows: writer.rows });
    };
    const terminal = takeTerminal(io, {
      onEnd: (code) => end(code),
      onCrash: (error) => end(1, noteCrash(error, io.env, new Date())),
      onContinue: () => {
        resized();
        writer.repaint();
      },
      onResize: resized,
      onData: (chunk) => {
        if (escapeTimer !== null) clearTimeout(escapeTimer);
        escapeTimer = null;
        for (const input of keys.feed(chunk)) if (!ended) store.dispatch(input);
        if (!keys.holding || ended) return;
        escapeTimer = setTimeout(() => {
          for (const input of keys.flush()) if (!ended) store.dispatch(input);
        }, escapeWait);
      },
    });
    const ink = render(<App store={store} look={look} slots={slots} />, {
      stdout: writer as unknown as NodeJS.WriteStream,
      // Keys come through our own reader; the layout library gets a stream on which nothing ever arrives.
      stdin: new PassThrough() as unknown as NodeJS.ReadStream,
      debug: true,
      exitOnCtrlC: false,
      patchConsole: false,
      isScreenReaderEnabled: false,
    });
    store.dispatch({ kind: "size", columns: writer.columns, rows: writer.rows });
    void perform(desk, { do: "load" }, store.dispatch, () => {});
  });
}

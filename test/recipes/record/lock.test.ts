/** One holder at a time, whoever comes, dies, comes back under the same number, or leaves rubbish. */
import { describe, expect, it } from "vitest";
import type { Ports } from "../../../recipes/ports.ts";
import { breakLockByHand, type Lock, lockHolder, takeLock, withLock } from "../../../recipes/record/lock.ts";
import { FOLDER } from "../../support/book-bench.ts";
import { faultyFiles } from "../../support/faulty-files.ts";
import { MemoryFiles, memoryPorts } from "../../support/memory-files.ts";

const LOCK = "/line/book.lock";
const onlyAlive =
  (...pids: number[]): Ports["processAlive"] =>
  (pid) =>
    pids.includes(pid);

describe("the lock", () => {
  it("is refused after ten seconds with holder, host and age, and nothing is left behind", async () => {
    const files = new MemoryFiles();
    await takeLock(FOLDER, memoryPorts(files, { pid: 1, person: "Ben" }));
    const ports = memoryPorts(files, { pid: 2 });
    const began = ports.clock.ms;
    await expect(takeLock(FOLDER, ports)).rejects.toMatchObject({
      code: "locked",
      message: expect.stringMatching(/Ben \(process 1\) on bench, for 10 s/),
    });
    expect(ports.clock.ms - began).toBe(10_000);
    expect(files.list(FOLDER)).toEqual(["book.lock"]);
  });

  it("passes on as soon as the holder releases it", async () => {
    const files = new MemoryFiles();
    const first = await takeLock(FOLDER, memoryPorts(files, { pid: 1 }));
    const ports = memoryPorts(files, { pid: 2 });
    const sleep = ports.sleep;
    ports.sleep = async (ms) => {
      await sleep(ms);
      if (ports.clock.ms > Date.UTC(2026, 2, 1, 12) + 300) first.release();
    };
    const second = await takeLock(FOLDER, ports);
    expect(lockHolder(FOLDER, ports)).toMatchObject({ pid: 2, token: second.token });
    expect(ports.clock.ms - Date.UTC(2026, 2, 1, 12)).toBeLessThan(600);
  });

  it("of a process that is gone is broken at once", async () => {
    const files = new MemoryFiles();
    await takeLock(FOLDER, memoryPorts(files, { pid: 1 }));
    const lock = await takeLock(FOLDER, memoryPorts(files, { pid: 2, processAlive: onlyAlive(2) }), 0);
    expect(files.list(FOLDER)).toEqual(["book.lock"]);
    lock.release();
    expect(files.list(FOLDER)).toEqual([]);
  });

  it("of a process whose number another has now is broken; of the same process it is not", async () => {
    const files = new MemoryFiles();
    await takeLock(FOLDER, memoryPorts(files, { pid: 1, processStart: () => "boot+100" }));
    const waiting = takeLock(FOLDER, memoryPorts(files, { pid: 2, processStart: () => "boot+100" }), 0);
    await expect(waiting).rejects.toMatchObject({ code: "locked" });
    await takeLock(FOLDER, memoryPorts(files, { pid: 2, processStart: () => "boot+999" }), 0);
    expect(lockHolder(FOLDER, memoryPorts(files))).toMatchObject({ pid: 2 });
  });

  it("of another host is never broken by itself, and the message says why", async () => {
    const files = new MemoryFiles();
    await takeLock(FOLDER, memoryPorts(files, { pid: 1, host: "far" }));
    const ports = memoryPorts(files, { pid: 2, processAlive: onlyAlive(2) });
    await expect(takeLock(FOLDER, ports)).rejects.toThrow(/on far.*cannot be told from here/);
    expect(breakLockByHand(FOLDER, ports)).toBe(true);
    expect(breakLockByHand(FOLDER, ports)).toBe(false);
    await takeLock(FOLDER, ports, 0);
  });

  it.each([
    ["empty", ""],
    ["garbage", "\u0000\u0001 nonsense"],
    ["JSON of something else", '{"pid":"1"}'],
    ["null", "null"],
  ])("that is %s is not broken by itself, and the message has the way out", async (_, content) => {
    const files = new MemoryFiles();
    files.put(LOCK, content);
    const refused = takeLock(FOLDER, memoryPorts(files, { processAlive: () => false }), 100);
    await expect(refused).rejects.toMatchObject({
      code: "locked",
      problems: [{ hint: expect.stringContaining("remove") }],
    });
    expect(files.text(LOCK)).toBe(content);
  });

  it("is released only by its owner", async () => {
    const files = new MemoryFiles();
    const first = await takeLock(FOLDER, memoryPorts(files, { pid: 1 }));
    const second = await takeLock(FOLDER, memoryPorts(files, { pid: 2, processAlive: onlyAlive(2) }), 0);
    first.release();
    expect(lockHolder(FOLDER, memoryPorts(files))).toMatchObject({ token: second.token });
  });

  it("is released when the work under it throws", async () => {
    const files = new MemoryFiles();
    const work = withLock(FOLDER, memoryPorts(files), () => {
      throw new Error("on purpose");
    });
    await expect(work).rejects.toThrow("on purpose");
    expect(files.list(FOLDER)).toEqual([]);
  });

  it("works where the file system has no links", async () => {
    const files = faultyFiles(new MemoryFiles(), { at: 1, how: "EPERM", from: "from then on", only: ["link"] });
    const lock = await takeLock(FOLDER, memoryPorts(files, { pid: 1 }), 0);
    await expect(takeLock(FOLDER, memoryPorts(files, { pid: 2 }), 0)).rejects.toMatchObject({ code: "locked" });
    lock.release();
    expect(files.list(FOLDER)).toEqual([]);
  });

  it("that could not be released by a living process is void for that process", async () => {
    const inner = new MemoryFiles();
    const files = faultyFiles(inner, { at: 2, how: "EIO", from: "once", only: ["remove"] });
    const ports = memoryPorts(files);
    (await takeLock(FOLDER, ports)).release();
    expect(inner.list(FOLDER)).toEqual(["book.lock"]);
    (await takeLock(FOLDER, ports, 0)).release();
    expect(inner.list(FOLDER)).toEqual([]);
  });

  it("never has two holders when two find it stale at once, however their steps interleave", async () => {
    // each breaker is held up before every call in turn, while the other goes through as far as it can
    for (let pause = 1; pause < 40; pause++) {
      const inner = new MemoryFiles();
      await takeLock(FOLDER, memoryPorts(inner, { pid: 1 }));
      const holders: Lock[] = [];
      let calls = 0;
      const other = memoryPorts(inner, { pid: 3, processAlive: onlyAlive(2, 3) });
      const attempts: Promise<unknown>[] = [];
      const take = (ports: Ports) =>
        takeLock(FOLDER, ports, 0)
          .then((lock) => holders.push(lock))
          .catch(() => 0);
      const interrupted = new Proxy(inner, {
        get(target, name: keyof MemoryFiles) {
          const member: unknown = Reflect.get(target, name, target);
          if (typeof member !== "function") return member;
          return (...args: unknown[]): unknown => {
            // takeLock runs without a pause up to its first sleep, so this lets the other through in the middle
            if (++calls === pause) attempts.push(take(other));
            return Reflect.apply(member, target, args);
          };
        },
      });
      await take(memoryPorts(interrupted, { pid: 2, processAlive: onlyAlive(2, 3) }));
      await Promise.all(attempts);
      expect(holders.length, `pause ${pause}`).toBe(1);
      expect(lockHolder(FOLDER, other)).toMatchObject({ token: holders[0].token });
    }
  });

  it("a breaker that died half-way does not keep the lock for ever", async () => {
    for (let at = 1; at < 30; at++) {
      const inner = new MemoryFiles();
      await takeLock(FOLDER, memoryPorts(inner, { pid: 1 }));
      const dying = faultyFiles(inner, { at, how: "killed" });
      await takeLock(FOLDER, memoryPorts(dying, { pid: 2, processAlive: onlyAlive(2) }), 0).catch(() => 0);
      if (!dying.struck()) break;
      const lock = await takeLock(FOLDER, memoryPorts(inner, { pid: 3, processAlive: onlyAlive(3) }), 500);
      lock.release();
      expect(inner.exists(LOCK), `killed at ${at}`).toBe(false);
    }
  });
});

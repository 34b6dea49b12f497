import { createHash } from "node:crypto";
import { gzipSync } from "node:zlib";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { dirtyLog, plainRead } from "./dirty-log.ts";
import { asideOf, imbalance, iso, readTexts } from "./in-memory.ts";

const settings = { channels: ["a", "b"], missing: ["-9999", "NAN"] };

describe("dirty logs (property)", () => {
  it("agree with a plain reader, row by row and count by count", async () => {
    await fc.assert(
      fc.asyncProperty(dirtyLog, fc.constantFrom(1, 7, 65_536), async (log, chunk) => {
        const twin = plainRead(log);
        const { rows, accounts } = await readTexts(
          { log: log.text },
          { ...settings, lateBy_us: log.lateBy_us },
          chunk,
        );
        const { rows: account } = accounts[0]!;
        expect(rows).toEqual(twin.rows);
        expect({ read: account.read, used: account.used, merged: account.merged }).toEqual({
          read: twin.read,
          used: twin.used,
          merged: twin.merged,
        });
        const firstFive = Object.entries(twin.aside).map(([reason, lines]) => [reason, lines.slice(0, 5)]);
        expect(asideOf(account)).toEqual(Object.fromEntries(firstFive));
        for (const [reason, lines] of Object.entries(twin.aside))
          expect(account.setAside.get(reason)!.count).toBe(lines.length);
        expect(account.reordered).toEqual({
          count: twin.reordered.length,
          firstLines: twin.reordered.slice(0, 5),
        });
        expect(account.missingCells).toEqual(twin.missing);
        expect(account.unreadableCells.map((u) => u.count)).toEqual(twin.unreadable.map((u) => u.length));
        expect(imbalance(account)).toBe(0);
      }),
      { numRuns: 600 },
    );
  });

  it("give the same rows, whether they come in one file or in several", async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.array(fc.integer({ min: -3, max: 6 }), { minLength: 2, maxLength: 200 }),
        fc.array(fc.integer({ min: 1, max: 200 }), { maxLength: 5 }),
        async (steps, cuts) => {
          let second = 10;
          const lines = steps
            .map((step, i) => {
              second += step;
              return `2031-03-04T00:${String(Math.floor(second / 60)).padStart(2, "0")}:${String(((second % 60) + 60) % 60).padStart(2, "0")}Z,${i}`;
            })
            .filter((line) => /T00:\d\d/.test(line));
          const whole = await readTexts({ one: `time,a\n${lines.map((l) => `${l}\n`).join("")}` });
          const parts: Record<string, string> = {};
          const edges = [
            0,
            ...[...new Set(cuts)].filter((c) => c < lines.length).sort((a, b) => a - b),
            lines.length,
          ];
          for (let k = 1; k < edges.length; k++)
            parts[`part-${9 - k}`] = `time,a\n${lines
              .slice(edges[k - 1], edges[k])
              .map((l) => `${l}\n`)
              .join("")}`;
          const cut = await readTexts(parts);
          expect(cut.rows.map((r) => r[0])).toEqual(whole.rows.map((r) => r[0]));
          for (const { rows } of cut.accounts) expect(imbalance(rows)).toBe(0);
          const used = cut.accounts.reduce((sum, { rows }) => sum + rows.used, 0);
          expect(used).toBe(cut.rows.length);
        },
      ),
      { numRuns: 200 },
    );
  });
});

describe("several files of one series", () => {
  const day = (d: number, n: number, value: number) =>
    `time,a\n${Array.from({ length: n }, (_, i) => `${iso(Date.UTC(2031, 2, d) * 1000 + i * 60e6)},${value}\n`).join("")}`;

  it("are read in the order of their first times, whatever their names", async () => {
    const { rows, accounts } = await readTexts({ z: day(4, 3, 1), a: day(5, 3, 2), m: day(3, 3, 0) });
    expect(rows.map((r) => r[1])).toEqual([0, 0, 0, 1, 1, 1, 2, 2, 2]);
    expect(accounts.map((a) => a.file)).toEqual(["z", "a", "m"]);
  });

  it("that overlap are merged: repeats merge, contradictions leave the earlier file's row", async () => {
    const first = "time,a,b\n2031-03-04T00:00:00Z,1,\n2031-03-04T00:02:00Z,2,5\n2031-03-06T00:00:00Z,3,6\n";
    const second =
      "time,a,b\n2031-03-04T00:01:00Z,9,9\n2031-03-04T00:02:00Z,2,7\n2031-03-05T00:00:00Z,4,4\n2031-03-06T00:00:00Z,3,6\n";
    const third = "time,a,b\n2031-03-04T00:00:00Z,1,8\n";
    const { rows, accounts } = await readTexts({ first, second, third }, { channels: ["a", "b"] });
    expect(rows.map(([t, ...v]) => [iso(t!).slice(8, 16), ...v])).toEqual([
      ["04T00:00", 1, 8],
      ["04T00:01", 9, 9],
      ["04T00:02", 2, 5],
      ["05T00:00", 4, 4],
      ["06T00:00", 3, 6],
    ]);
    const [a, b, c] = accounts.map((account) => account.rows);
    expect([a!.used, a!.merged]).toEqual([3, 0]);
    expect([b!.used, b!.merged, asideOf(b!)]).toEqual([2, 1, { "conflicting-time": [3] }]);
    expect([c!.used, c!.merged]).toEqual([0, 1]);
  });

  it("do not stop each other: each bad one is one diagnostic", async () => {
    const good = day(4, 3, 1);
    const { rows, diagnostics, accounts } = await readTexts({
      empty: "",
      names: "time,a\n",
      other: "zeit,a\n2031-03-04T00:00:00Z,1\n",
      lacks: "time,A1\n2031-03-04T00:00:00Z,1\n",
      twice: "time,a,a\n2031-03-04T00:00:00Z,1,2\n",
      picture: Buffer.concat([Buffer.from("\x89PNG\r\n\x1a\n", "latin1"), Buffer.alloc(2000, 7)]),
      noise: Buffer.from(Array.from({ length: 4000 }, (_, i) => (i * i * 31 + 7 * i) % 256)),
      nuls: Buffer.alloc(5000),
      local: "time,a\n2031-03-04T00:00:00,1\n",
      words: "time,a\nnoon,1\n",
      useless: "time,a\n2031-03-04T00:00:00Z,x\n",
      good,
    });
    expect(rows.length).toBe(3);
    expect(Object.fromEntries(diagnostics.map((d) => [d.file, d.code]))).toEqual({
      empty: "log-empty",
      names: "log-without-rows",
      other: "time-column-missing",
      lacks: "channel-column-missing",
      twice: "column-twice",
      picture: "log-not-text",
      noise: "log-not-text",
      nuls: "log-not-text",
      local: "zone-needed",
      words: "no-readable-time",
      useless: "no-usable-rows",
    });
    expect(diagnostics.every((d) => d.severity === "error")).toBe(true);
    expect(accounts.length).toBe(12);
    for (const account of accounts) expect(imbalance(account.rows)).toBe(0);
    const lacks = diagnostics.find((d) => d.file === "lacks")!;
    expect([lacks.given, lacks.allowed]).toEqual(["time, A1", "the nearest name in the log is A1"]);
  });
});

describe("gzip", () => {
  const text = `time,a\n${Array.from({ length: 20_000 }, (_, i) => `${iso(Date.UTC(2031, 2, 4) * 1000 + i * 1e6)},${i}.5\n`).join("")}`;
  const packed = gzipSync(text);

  it("is recognised by its first bytes, and said", async () => {
    const { rows, accounts } = await readTexts({ "log.csv": packed });
    expect(rows.length).toBe(20_000);
    const { bytes, sha256, found } = accounts[0]!;
    expect(found["compression"]).toBe("gzip");
    expect([bytes, sha256]).toEqual([packed.length, createHash("sha256").update(packed).digest("hex")]);
  });

  it("that breaks off gives the rows before the damage, the same ones however the bytes come", async () => {
    const cut = packed.subarray(0, 40_000);
    const results = [];
    for (const chunk of [1, 777, 65_536]) {
      const { rows, diagnostics, accounts } = await readTexts({ log: cut }, {}, chunk);
      expect(diagnostics.map((d) => d.code)).toEqual(["log-damaged"]);
      expect([accounts[0]!.bytes, imbalance(accounts[0]!.rows)]).toEqual([40_000, 0]);
      expect(accounts[0]!.sha256).toBe(createHash("sha256").update(cut).digest("hex"));
      results.push(rows);
    }
    expect(results[0]!.length).toBeGreaterThan(1000);
    expect(results[1]).toEqual(results[0]);
    expect(results[2]).toEqual(results[0]);
  });
});

describe("what stands behind the packed part", () => {
  const packed = gzipSync("time,a\n2031-03-04T00:00:00Z,1.5\n");
  const more = gzipSync("2031-03-04T00:00:01Z,2.5\n");
  it("may be another one, or zero bytes", async () => {
    for (const chunk of [1, 20, 65_536]) {
      const { rows, diagnostics } = await readTexts(
        { log: Buffer.concat([packed, more, Buffer.alloc(3000)]) },
        {},
        chunk,
      );
      expect([rows.length, diagnostics]).toEqual([2, []]);
    }
  });
  it("is named when it is anything else", async () => {
    const log = Buffer.concat([packed, Buffer.alloc(2000, "x")]);
    const { diagnostics } = await readTexts({ log });
    expect(diagnostics.map((d) => d.code)).toEqual(["log-damaged"]);
  });
});

describe("the last line", () => {
  const body =
    "time,a,b\n2031-03-04T00:00:00Z,1.25,7\n2031-03-04T00:00:01Z,1.26,7\n2031-03-04T00:00:02Z,1.27,7\n";
  const last = async (line: string, text = body, channels = ["a", "b"]) => {
    const { rows, accounts } = await readTexts({ log: text + line }, { channels });
    return [rows.length, asideOf(accounts[0]!.rows)];
  };
  it("without line end is never read as a short number", async () => {
    expect(await last("2031-03-04T00:00:03Z,1.2")).toEqual([3, { "cut-short": [5] }]);
    expect(await last("2031-03-04T00:00:03Z,1.28,7")).toEqual([3, { "cut-short": [5] }]);
    expect(await last("2031-03-04T00:0")).toEqual([3, { "cut-short": [5] }]);
    expect(await last('2031-03-04T00:00:03Z,1.28,"7')).toEqual([3, { "unclosed-quote": [5] }]);
  });
  it("is used where it is certain to be whole", async () => {
    expect(await last('2031-03-04T00:00:03Z,1.28,"7"')).toEqual([4, {}]);
    expect(await last("2031-03-04T00:00:03Z,1.28,7", body, ["a"])).toEqual([4, {}]);
    const decimals = body.replaceAll(",7\n", "\n").replace(",b", "");
    expect(await last("2031-03-04T00:00:03Z,1.28", decimals, ["a"])).toEqual([4, {}]);
    expect(await last("2031-03-04T00:00:03Z,1.2", decimals, ["a"])).toEqual([3, { "cut-short": [5] }]);
  });
});

describe("rows and cells", () => {
  it("one unreadable cell is a missing cell; a row with nothing readable is set aside", async () => {
    const text =
      "time,a,b\n2031-03-04T00:00:00Z,1,0x1F\n2031-03-04T00:00:01Z,true,1_000\n2031-03-04T00:00:02Z,-9999,12abc\n2031-03-04T00:00:03Z,,\n";
    const { rows, accounts } = await readTexts({ log: text }, settings);
    expect(rows.map((r) => r.slice(1))).toEqual([
      [1, Number.NaN],
      [Number.NaN, Number.NaN],
    ]);
    const { rows: account } = accounts[0]!;
    expect(asideOf(account)).toEqual({ "no-readable-value": [3, 4] });
    expect(account.missingCells).toEqual([2, 1]);
    expect(account.unreadableCells).toEqual([
      { count: 1, firstLines: [3] },
      { count: 3, firstLines: [2, 3, 4] },
    ]);
  });

  it("rows with nameless empty cells at the end are not ragged", async () => {
    const text =
      "time,a,,\n2031-03-04T00:00:00Z,1,,\n2031-03-04T00:00:01Z,2\n2031-03-04T00:00:02Z,3,,,,\n2031-03-04T00:00:03Z,4,,,5\n";
    const { rows, accounts } = await readTexts({ log: text });
    expect(rows.map((r) => r[1])).toEqual([1, 2, 3]);
    expect(asideOf(accounts[0]!.rows)).toEqual({ ragged: [5] });
  });

  it("a cell that begins with # is no comment where the time stands elsewhere", async () => {
    const text = "a,time\n####,2031-03-04T00:00:00Z\n1,2031-03-04T00:00:01Z\n# end,of log\n";
    const { rows, accounts } = await readTexts({ log: text });
    expect(rows.length).toBe(1);
    expect(asideOf(accounts[0]!.rows)).toEqual({ "no-readable-value": [2] });
    expect(accounts[0]!.found["comment lines"]).toBe("1 (line 4)");
  });

  it("times are strictly increasing over many blocks, and late rows find their place", async () => {
    const lines: string[] = [];
    for (let i = 0; i < 30_000; i++) {
      const place = i % 100 === 50 ? i - 40.5 : i;
      lines.push(`${1_930_348_800 + place},${i}`);
    }
    const { rows, accounts } = await readTexts(
      { log: `time,a\n${lines.join("\n")}\n` },
      { time: { column: "time", form: "unix-s" }, lateBy_us: 60e6 },
    );
    expect(rows.length).toBe(30_000);
    for (let i = 1; i < rows.length; i++) expect(rows[i]![0]! > rows[i - 1]![0]!).toBe(true);
    expect(accounts[0]!.rows.reordered).toEqual({ count: 300, firstLines: [52, 152, 252, 352, 452] });
    expect(accounts[0]!.found["backward steps of the clock"]).toBe(
      "300 (first lines 52, 152, 252, 352, 452)",
    );
  });
});

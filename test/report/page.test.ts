/** The report page in a real browser (Debian's Chromium, headless), made from a real run with hostile names. */
import { existsSync } from "node:fs";
import { join } from "node:path";
import { type Browser, chromium, type Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { account, forebay, place, put, text } from "../cli/harness.ts";

const CHROMIUM = "/usr/bin/chromium";
const present = existsSync(CHROMIUM) || process.env["CI"] !== undefined;
if (!present)
  console.warn("page tests left out: no Chromium at /usr/bin/chromium (apt-get install chromium)");

const folder = place();
const HOSTILE = `"><img src=x onerror=alert(1)>`;

describe.runIf(present)("report page", () => {
  let browser: Browser;
  const trouble: string[] = [];

  beforeAll(async () => {
    const rows = Array.from({ length: 4000 }, (_, i) => {
      const x = 3 + Math.sin(i / 50) + 0.2 * Math.sin(2 * Math.PI * 0.21 * i);
      return `${i},${x.toFixed(4)},${(1000 * x).toFixed(1)}`;
    });
    put(folder, "log.csv", `t,A,B\n${rows.join("\n")}\n`);
    put(
      folder,
      "page.yaml",
      `name: page
about: 'hostile <b>about</b> ${HOSTILE.replaceAll("'", "''")}'
logs: { files: log.csv, time: { column: t, form: unix-s } }
channels:
  level: { column: A, unit: '<u>m</u>' }
  other: { column: B, unit: m3/s }
chain:
  - { stage: resample, interval: 1 s }
  - { stage: detrend, degree: 1 }
  - { stage: moving-average, points: 11 }
  - { stage: decimate, by: 5 }
  - { stage: report }
requirements: { delay: 0 s, keep: [{ from: 0 Hz, to: 10 mHz, ripple: 0.1 dB }] }
writes: { folder: out }
`,
    );
    const run = forebay(folder, "clean", "page.yaml");
    expect(run.stderr).not.toContain("fault");
    expect([0, 4]).toContain(run.status);
    browser = await chromium.launch({
      executablePath: CHROMIUM,
      args: [
        "--no-sandbox",
        "--disable-gpu",
        "--disable-quic",
        "--no-first-run",
        "--disable-background-networking",
        "--disable-component-update",
        "--disable-sync",
      ],
    });
  });
  afterAll(async () => browser?.close());

  async function open(width: number, colorScheme: "light" | "dark"): Promise<Page> {
    const page = await browser.newPage({ viewport: { width, height: 900 }, colorScheme });
    page.on("console", (m) => trouble.push(`console: ${m.text()}`));
    page.on("pageerror", (e) => trouble.push(`error: ${e.message}`));
    page.on("request", (r) => {
      if (!r.url().startsWith("file:") && !r.url().startsWith("data:")) trouble.push(`request: ${r.url()}`);
    });
    page.on("dialog", (d) => {
      trouble.push("a script ran");
      void d.dismiss();
    });
    await page.goto(`file://${join(folder, "out", "page.report.html")}`);
    return page;
  }

  it("raises no error, asks for nothing outside, and runs nothing from the data", async () => {
    const page = await open(1200, "light");
    expect(await page.locator("img").count()).toBe(0);
    expect(await page.locator("script").count()).toBe(0);
    expect(await page.locator("svg.plot").count()).toBeGreaterThan(4);
    expect(trouble).toEqual([]);
    await page.close();
  });

  it("does not scroll sideways at 360 px nor at 1600 px", async () => {
    for (const width of [360, 800, 1600]) {
      const page = await open(width, "light");
      expect(await page.evaluate("document.documentElement.scrollWidth")).toBeLessThanOrEqual(width);
      await page.close();
    }
  });

  it("has its headings in order and every anchor once", async () => {
    const page = await open(1200, "light");
    const levels = (await page.evaluate(
      "[...document.querySelectorAll('h1,h2,h3,h4')].map((h) => Number(h.tagName[1]))",
    )) as number[];
    expect(levels[0]).toBe(1);
    levels.slice(1).forEach((level, i) => expect(level).toBeLessThanOrEqual(levels[i]! + 1));
    const ids = (await page.evaluate("[...document.querySelectorAll('[id]')].map((e) => e.id)")) as string[];
    expect(new Set(ids).size).toBe(ids.length);
    const broken = await page.evaluate(
      "[...document.querySelectorAll('a[href^=\"#\"]')].filter((a) => !document.getElementById(a.getAttribute('href').slice(1))).length",
    );
    expect(broken).toBe(0);
    await page.close();
  });

  it("has a contrast of at least 4.5 to 1 for all text, light and dark", async () => {
    for (const scheme of ["light", "dark"] as const) {
      const page = await open(1200, scheme);
      const worst = (await page.evaluate(`(() => {
        const rgb = (c) => c.match(/[\\d.]+/g).map(Number);
        const lum = ([r, g, b]) => [r, g, b].map((v) => { v /= 255; return v <= 0.03928 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4; }).reduce((s, v, i) => s + v * [0.2126, 0.7152, 0.0722][i], 0);
        const ground = (e) => { for (; e; e = e.parentElement) { const c = rgb(getComputedStyle(e).backgroundColor); if (c.length < 4 || c[3] > 0) return c; } return [255, 255, 255]; };
        let worst = 99;
        for (const e of document.querySelectorAll("h1,h2,h3,p,li,td,th,caption,dt,dd,figcaption,summary,pre,a,strong,text")) {
          const style = getComputedStyle(e);
          const ink = rgb(e.tagName === "text" ? style.fill : style.color);
          const [a, b] = [lum(ink), lum(ground(e))].sort((x, y) => y - x);
          worst = Math.min(worst, (a + 0.05) / (b + 0.05));
        }
        return worst;
      })()`)) as number;
      expect(worst, scheme).toBeGreaterThanOrEqual(4.5);
      await page.close();
    }
  });

  it("says in its headline what the account says", async () => {
    const page = await open(1200, "light");
    const facts = ((await page.locator(".facts").textContent()) ?? "").replaceAll("\u202f", "");
    const a = account(folder, "out", "page.account.json");
    expect(facts).toContain(`${a.inputs[0]!.rows.read} rows`);
    expect(facts).toContain(`${a.outputs[0]!.rows} samples`);
    const verdict = await page.locator(".verdict strong").textContent();
    expect(verdict).toBe(
      a.verdict.met ? "All requirements and alias limits are met." : "Not met: read this first.",
    );
    for (const remark of a.verdict.remarks)
      expect(await page.locator(".verdict").textContent()).toContain(remark);
    await page.close();
  });

  it("prints without cutting a plot", async () => {
    const page = await open(1200, "dark");
    const pdf = await page.pdf({ format: "A4", printBackground: true });
    expect(pdf.subarray(0, 5).toString()).toBe("%PDF-");
    await page.emulateMedia({ media: "print" });
    const breaks = await page.evaluate(
      "[...document.querySelectorAll('figure')].every((f) => getComputedStyle(f).breakInside === 'avoid')",
    );
    expect(breaks).toBe(true);
    await page.close();
  });

  it("holds its own content policy and no unescaped data", () => {
    const html = text(folder, "out", "page.report.html");
    expect(html).toMatch(/default-src 'none'; style-src 'sha256-[A-Za-z0-9+/=]+'/);
    expect(html).not.toContain("<img");
    expect(html).not.toContain("<u>m</u>");
  });
});

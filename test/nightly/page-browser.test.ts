/** The index page in a real browser: accessible, quiet, filtered as asked, and no wider than a telephone. */
import { readFileSync } from "node:fs";
import { mkdtemp, rm, writeFile } from "node:fs/promises";
import { createRequire } from "node:module";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { type Browser, type BrowserContextOptions, chromium, type Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { CheckRow } from "../../src/nightly/history/records.ts";
import { indexPage } from "../../src/nightly/page/page.ts";
import { trendsOf } from "../../src/nightly/trends.ts";
import { systemTool } from "../support/require.ts";
import { FIRST_NIGHT, nightOf, record } from "./synthetic.ts";

const AXE = readFileSync(createRequire(import.meta.url).resolve("axe-core/axe.min.js"), "utf8");
const HOSTILE = `<img src=x onerror="alert(1)">'"&\u202e`;
const executablePath = systemTool("chromium");
const ARGUMENTS = [
  "--headless",
  "--no-sandbox",
  "--disable-gpu",
  "--disable-quic",
  "--no-first-run",
  "--disable-background-networking",
  "--disable-component-update",
  "--disable-sync",
];

function silent(antenna: string): Extract<CheckRow, { error: null }>["findings"][number] {
  return {
    rule: "silent-antenna",
    family: "amplitude",
    verdict: "hold",
    severity: 1,
    title: "An antenna without fringes",
    place: `antenna ${antenna}`,
    antennas: [antenna],
    consequence: "None.",
  };
}

/** Twelve nights of three datasets: one antenna silent on two of them, one dataset not judged, hostile names. */
function content(): string {
  const checks: CheckRow[] = [];
  const interference = [];
  for (let night = 0; night < 12; night++) {
    for (let i = 0; i < 3; i++) {
      const bad = night % 6 === 5 && i === 1;
      const findings = bad ? [silent(night === 5 ? "A04" : HOSTILE)] : [];
      checks.push({
        ...record(night, {
          name: i === 2 ? HOSTILE : `field-${i}`,
          verdict: bad ? "hold" : "ready",
          cause: bad ? `An antenna without fringes: antenna ${HOSTILE}` : null,
          findings,
          start: FIRST_NIGHT + night + 0.3,
          end: FIRST_NIGHT + night + 0.8,
        }),
        id: checks.length,
      });
    }
    const start = FIRST_NIGHT + night + 0.42;
    interference.push({
      check: night,
      band: record(0).band,
      night: nightOf(night),
      low: 1.394e9,
      high: 1.395e9,
      start,
      end: start + 0.02,
    });
  }
  checks.push({ ...record(11, { name: "cut" }), id: 999, error: `${HOSTILE}: the file ends early` });
  const values = Float64Array.from(
    { length: 60 },
    (_, i) => 0.01 * Math.sin(i * i) - (i > 40 ? 0.02 * (i - 40) : 0),
  );
  const nights = Array.from({ length: 60 }, (_, i) => nightOf(i));
  const series = {
    band: HOSTILE,
    kind: "antenna" as const,
    item: HOSTILE,
    measure: "amplitude_ratio",
    nights,
    values,
  };
  return indexPage({
    summary: "summary",
    checks,
    trends: trendsOf([series], interference, checks),
    interference,
  });
}

let browser: Browser;
let folder: string;
let path: string;

async function open(
  options: BrowserContextOptions,
): Promise<{ page: Page; requests: string[]; complaints: string[] }> {
  const context = await browser.newContext(options);
  const page = await context.newPage();
  const requests: string[] = [];
  const complaints: string[] = [];
  page.on("request", (request) => requests.push(request.url()));
  page.on("console", (message) => complaints.push(message.text()));
  page.on("pageerror", (error) => complaints.push(String(error)));
  page.on("dialog", (dialog) => complaints.push(`dialog: ${dialog.message()}`));
  await page.goto(pathToFileURL(path).href);
  return { page, requests, complaints };
}

describe.skipIf(executablePath === undefined)("the index page in a browser", () => {
  beforeAll(async () => {
    folder = await mkdtemp(join(tmpdir(), "visvet-index-"));
    path = join(folder, "index.html");
    await writeFile(path, content());
    browser = await chromium.launch({ executablePath: executablePath!, args: ARGUMENTS });
  });
  afterAll(async () => {
    await browser?.close();
    await rm(folder, { recursive: true, force: true });
  });

  it.each(["light", "dark"] as const)(
    "is accessible when %s, asks for nothing and complains of nothing",
    async (colorScheme) => {
      const { page, requests, complaints } = await open({ colorScheme, bypassCSP: true });
      await page.evaluate(AXE);
      const { violations } = (await page.evaluate("axe.run()")) as {
        violations: { id: string; nodes: { html: string }[] }[];
      };
      expect(violations.map(({ id, nodes }) => `${id}: ${nodes[0]!.html}`)).toEqual([]);
      expect(requests).toHaveLength(1);
      expect(complaints).toEqual([]);
    },
  );

  it("filters by antenna, cause, verdict and night, under its own policy", async () => {
    const { page, complaints } = await open({});
    const shown = () => page.locator(".tile:visible").count();
    expect(await shown()).toBe(37);
    await page.selectOption("[name=antenna]", "A04");
    expect(await shown()).toBe(1);
    expect(await page.locator(".night:visible h3").textContent()).toContain(nightOf(5));
    // The hostile one, as it was escaped.
    await page.selectOption("[name=antenna]", { index: 1 });
    expect(await shown()).toBe(1);
    await page.click("button[type=reset]");
    await page.selectOption("[name=cause]", "silent-antenna");
    expect(await shown()).toBe(2);
    await page.selectOption("[name=cause]", "");
    await page.selectOption("[name=verdict]", "unreadable");
    expect(await shown()).toBe(1);
    await page.click("button[type=reset]");
    await page.fill("[name=from]", nightOf(10));
    expect(await shown()).toBe(7);
    await page.fill("[name=to]", nightOf(10));
    expect(await shown()).toBe(3);
    expect(await page.locator("#shown").textContent()).toBe("3 of 37 datasets shown");
    expect(complaints).toEqual([]);
  });

  it("shows everything without scripts, and no filter", async () => {
    const { page } = await open({ javaScriptEnabled: false });
    expect(await page.locator(".tile:visible").count()).toBe(37);
    expect(await page.locator("#filters:visible").count()).toBe(0);
  });

  it("is no wider than a telephone", async () => {
    const { page } = await open({ viewport: { width: 360, height: 800 } });
    expect(await page.evaluate("document.documentElement.scrollWidth")).toBeLessThanOrEqual(360);
  });
});

/** The page in a real browser: accessible, quiet, and no wider than a telephone. */
import { readFileSync } from "node:fs";
import { mkdtemp, rm, writeFile } from "node:fs/promises";
import { createRequire } from "node:module";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { type Browser, type BrowserContextOptions, chromium, type Page } from "playwright-core";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { writeHtml } from "../../src/report/html.ts";
import type { Check } from "../../src/report/report.ts";
import { systemTool } from "../support/require.ts";
import { cleanCheck, emptyCheck, faultyCheck, HOSTILE, hostileCheck } from "./fixtures.ts";

const AXE = readFileSync(createRequire(import.meta.url).resolve("axe-core/axe.min.js"), "utf8");
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

interface Violation {
  readonly id: string;
  readonly impact: string | null;
  readonly nodes: readonly { readonly html: string; readonly failureSummary?: string }[];
}

let browser: Browser;
let folder: string;

/** Open a check's page and keep what it asks for and complains of. */
async function open(
  check: Check,
  options: BrowserContextOptions,
): Promise<{ page: Page; requests: string[]; complaints: string[] }> {
  const path = join(folder, "report.html");
  await writeFile(path, writeHtml(check));
  const context = await browser.newContext(options);
  const page = await context.newPage();
  const requests: string[] = [];
  const complaints: string[] = [];
  page.on("request", (request) => requests.push(request.url()));
  page.on("console", (message) => complaints.push(message.text()));
  page.on("pageerror", (error) => complaints.push(String(error)));
  page.on("dialog", (dialog) => complaints.push(`dialog: ${dialog.message()}`));
  await page.goto(pathToFileURL(path).href);
  return { page, requests: requests.filter((url) => !url.startsWith("data:")), complaints };
}

async function violations(page: Page): Promise<string[]> {
  await page.evaluate(AXE);
  const found = (await page.evaluate("axe.run()")) as { violations: Violation[] };
  return found.violations.map(
    ({ id, impact, nodes }) => `${id} (${impact}): ${nodes[0]!.html} ${nodes[0]!.failureSummary ?? ""}`,
  );
}

describe.skipIf(executablePath === undefined)("the page in a browser", () => {
  beforeAll(async () => {
    folder = await mkdtemp(join(tmpdir(), "visvet-page-"));
    browser = await chromium.launch({ executablePath: executablePath!, args: ARGUMENTS });
  });

  afterAll(async () => {
    await browser?.close();
    await rm(folder, { recursive: true, force: true });
  });

  const checks: readonly (readonly [string, () => Check])[] = [
    ["a hold", faultyCheck],
    ["clean data", cleanCheck],
    ["nothing usable", emptyCheck],
    ["a script for a name", () => hostileCheck(HOSTILE.script)],
    ["an endless name", () => hostileCheck(HOSTILE.endless)],
  ];

  it.each(checks)(
    "asks for nothing but itself, has no complaint and fits 360 pixels: %s",
    async (_, make) => {
      const { page, requests, complaints } = await open(make(), { viewport: { width: 360, height: 780 } });
      const width = await page.evaluate("document.documentElement.scrollWidth");
      expect(requests).toHaveLength(1);
      expect(complaints).toEqual([]);
      expect(width).toBe(360);
      await page.context().close();
    },
  );

  it.each([
    ["wide and light", { viewport: { width: 1400, height: 900 } }],
    ["wide and dark", { viewport: { width: 1400, height: 900 }, colorScheme: "dark" }],
    ["narrow", { viewport: { width: 380, height: 780 } }],
  ] as const)("has no accessibility violation that axe finds: %s", async (_, options) => {
    // The page's own policy would keep the checker out.
    const { page } = await open(faultyCheck(), { ...options, bypassCSP: true });
    expect(await violations(page)).toEqual([]);
    await page.context().close();
  });

  it("shows its charts at every width with text of at least 9 pixels", async () => {
    for (const width of [360, 700, 1400]) {
      const { page } = await open(faultyCheck(), { viewport: { width, height: 800 } });
      const sizes = (await page.evaluate(`
        [...document.querySelectorAll("svg.chart")].map((chart) => {
          const scale = chart.getBoundingClientRect().width / chart.viewBox.baseVal.width;
          return scale * parseFloat(getComputedStyle(chart).fontSize);
        })`)) as number[];
      expect(sizes).toHaveLength(8);
      expect(Math.min(...sizes)).toBeGreaterThan(9);
      await page.context().close();
    }
  });
});

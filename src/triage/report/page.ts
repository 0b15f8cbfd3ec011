/** The page of a triage: one file that needs no network, no script and nothing beside it. */
import { POLICY } from "../../report/html.ts";
import { figure } from "../../report/page/figures.ts";
import { html, Markup, type Piece } from "../../report/page/markup.ts";
import { dataTable, section, stackedTable } from "../../report/page/parts.ts";
import { STYLE } from "../../report/page/style.ts";
import { tool } from "../../report/tool.ts";
import { PROPOSALS, sentence, upperFirst } from "../../report/words.ts";
import { formatNumber, formatPercent } from "../../util/units.ts";
import type { TriageCause } from "../causes/cause.ts";
import type { ImageFindings, Triage } from "../triage.ts";
import { imageChart } from "./image-chart.ts";
import { uvChart } from "./uv-chart.ts";
import { symptomTable, trackTable, triageFacts, weightText } from "./words.ts";

const CONTENTS: readonly (readonly [string, string])[] = [
  ["causes", "Causes"],
  ["symptoms", "Symptoms"],
  ["flags", "Flags"],
  ["plots", "Plots"],
  ["uv", "uv plane"],
  ["blind", "Not seen"],
];

export function triagePage(triage: Triage): string {
  const { name, version } = tool();
  const { image, dataset } = triage;
  const shown = CONTENTS.filter(([id]) => image !== null || !["symptoms", "plots", "uv"].includes(id));
  return html`<!doctype html>
<html lang="en">
<head>
<meta charset="utf-8">
<meta http-equiv="Content-Security-Policy" content="${POLICY}">
<meta name="viewport" content="width=device-width, initial-scale=1">
<meta name="referrer" content="no-referrer">
<meta name="color-scheme" content="light dark">
<title>Triage: ${dataset.name}</title>
<style>${new Markup(STYLE)}</style>
</head>
<body>
<a class="skip" href="#main">Skip to the outcome</a>
<div class="sheet">
<header class="top">
<p class="mark">visvet triage</p>
<nav aria-label="Contents"><ul>${shown.map(([id, title]) => html`<li><a href="#${id}">${title}</a></li>`)}</ul></nav>
</header>
<main id="main">
${outcome(triage)}
${causesSection(triage)}
${symptomsSection(triage)}
${flagsSection(triage)}
${image !== null && plotsSection(image)}
${uvSection(triage)}
${section("blind", "What triage could not see", html`<ul class="plain">${triage.blindSpots.map((text) => html`<li>${sentence(text)}</li>\n`)}</ul>`)}
</main>
<footer><p>Written by ${name} ${version} from ${dataset.name}. Times are UTC. Neither dataset nor image has been changed.</p></footer>
</div>
</body>
</html>
`.text;
}

function outcome(triage: Triage): Markup {
  const { causes, statement, image } = triage;
  const tone =
    causes.length > 0 ? "hold" : image?.symptoms.some(({ present }) => present) ? "caution" : "ready";
  return html`
<section class="verdict ${tone}" aria-labelledby="outcome">
<h1 id="outcome">${triage.dataset.name}</h1>
<p class="advice"><strong>${statement}</strong></p>
<dl class="facts">
${triageFacts(triage).map(({ label, value }) => html`<div><dt>${label}</dt><dd>${value}</dd></div>\n`)}</dl>
</section>`;
}

function causesSection({ causes, minor, image }: Triage): Markup {
  const none =
    causes.length === 0 && html`<p>${image === null ? "The data show none." : "Nothing is blamed."}</p>`;
  const small =
    minor.length > 0 &&
    html`<div><h3 class="small">At fault in the data, though the image hardly shows it</h3>
<ul class="plain">${minor.map(({ title, where }) => html`<li>${title} (${where})</li>\n`)}</ul></div>`;
  return section("causes", "Causes", [none, causes.map(card), small]);
}

function card(cause: TriageCause, i: number): Markup {
  const id = `cause-${i + 1}`;
  const row = (label: string, text: Piece) => html`<dt>${label}</dt><dd>${text}</dd>`;
  return html`<article class="finding hold" aria-labelledby="${id}">
<div class="finding-head"><h3 id="${id}">${i + 1}. ${cause.title}</h3></div>
${cause.where !== "" && html`<p class="where">${upperFirst(cause.where)}</p>`}
<p class="in-image">${upperFirst(weightText(cause))}</p>
<div class="finding-grid" style="grid-template-columns:minmax(0,1fr)">
<dl class="pairs">${row("Cure", html`<strong>${cause.cure}</strong>`)}${row("Test", cause.test)}${row(
    "Evidence",
    cause.evidence.map((text) => html`<p>${text}</p>`),
  )}${cause.flags.length > 0 && row("Flags", cause.flags.join(", "))}${
    cause.rules.length > 0 && row("Rules", html`<span class="code">${cause.rules.join(", ")}</span>`)
  }</dl>
</div>
</article>`;
}

function symptomsSection(triage: Triage): Piece {
  const table = symptomTable(triage);
  if (table === null) return undefined;
  return section(
    "symptoms",
    "Symptoms",
    stackedTable(
      table.caption,
      [{ head: "Symptom" }, { head: "There", named: true }, { head: "Measured" }],
      table.rows,
    ),
  );
}

function flagsSection({ flags, words }: Triage): Markup {
  if (flags.length === 0) return section("flags", "Suggested flags", html`<p>None are suggested.</p>`);
  const rows = flags.map((flag) => [
    html`<span class="flag-id">${flag.id}</span>`,
    html`<strong>${upperFirst(words.scope(flag))}</strong><br>${sentence(words.reason(flag.reason, flag))}`,
    formatPercent(flag.fraction),
    formatPercent(flag.confidence),
    `-${formatPercent(flag.cost.sensitivityLossFraction)}`,
  ]);
  return section(
    "flags",
    "Suggested flags",
    html`<p class="note">${PROPOSALS} They are in flags.json, for visvet apply.</p>
${stackedTable(
  "Suggested flags and their cost",
  [
    { head: "Flag" },
    { head: "Drops" },
    { head: "Share", numeric: true, named: true },
    { head: "Confidence", numeric: true, named: true },
    { head: "Sensitivity", numeric: true, named: true },
  ],
  rows,
)}`,
  );
}

function plotsSection({ seen, cells }: ImageFindings): Markup {
  const unit = seen.image.unit === "" ? "of the image's unit" : seen.image.unit;
  const ramp = (full: number) =>
    html`<p class="ramp"><span>-${formatNumber(full)} ${unit} or less</span><span class="colours" aria-hidden="true"></span><span>+${formatNumber(full)} ${unit} or more</span></p>`;
  const { width, height } = seen.image;
  const whole = imageChart(
    seen,
    seen.image.pixels,
    "triage-image",
    `the image, ${width} by ${height} pixels`,
  );
  const left = imageChart(seen, seen.residual, "triage-residual", "the image without its sources");
  const strongest = cells.outliers.length;
  return section(
    "plots",
    "The image in plots",
    html`<div class="plots">${[
      figure(
        "image",
        "The image",
        whole.svg,
        "As it is in the file, north up and east left; sources are ringed, the cross is the centre.",
        [],
        ramp(whole.full),
      ),
      figure(
        "residual",
        "Without its sources",
        left.svg,
        "The sources as the data hold them, with what their heights and places may be off by, are taken out: the rest is what is to be explained.",
        [],
        ramp(left.full),
      ),
      figure(
        "uv-amplitude",
        "Amplitude in the uv plane",
        uvChart(seen, cells),
        `The transform of the image without its sources; darker is stronger. ${strongest} cells hold more than noise would; at most 600 are marked.`,
        [
          ["", "kept", "amplitude"],
          ["dot", "suggested", "out of family"],
        ],
      ),
    ]}</div>`,
  );
}

function uvSection(triage: Triage): Piece {
  if (triage.image === null) return undefined;
  const table = trackTable(triage);
  return section(
    "uv",
    "The uv plane",
    table === null ? html`<p>No cell of the uv plane is out of family.</p>` : dataTable(table),
  );
}

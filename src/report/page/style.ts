/**
 * The page's look. Colours are Okabe & Ito's (2008, Color Universal Design), darkened or lightened until they read on
 * their ground (WCAG 2.2, 4.5 to 1 for text); verdicts are told by word and shape as well.
 */
export const STYLE = `
:root {
  color-scheme: light dark;
  --ground: #f4f5f6;
  --surface: #ffffff;
  --ink: #17202b;
  --muted: #51606f;
  --rule: #d5dbe1;
  --accent: #005d94;
  --kept: #0072b2;
  --suggested: #d55e00;
  --suggested-text: #a34700;
  --flagged: #9aa5b1;
  --bad: #4a5561;
  --limit: #aa3d80;
  --limit-text: #96306f;
  --ready: #00614a;
  --ready-tint: #e2f2ec;
  --caution: #7d4e00;
  --caution-tint: #fbf0d9;
  --hold: #9e3206;
  --hold-tint: #fbe7de;
  --mono: ui-monospace, "SF Mono", "Cascadia Mono", "DejaVu Sans Mono", Consolas, monospace;
}
@media (prefers-color-scheme: dark) {
  :root {
    --ground: #10141a;
    --surface: #171d25;
    --ink: #e6ebf0;
    --muted: #a4b0bd;
    --rule: #303a46;
    --accent: #6dbcec;
    --kept: #4fa8dd;
    --suggested: #f08a3c;
    --suggested-text: #ffab6b;
    --flagged: #6d7987;
    --bad: #c3ccd6;
    --limit: #e08bbd;
    --limit-text: #eeaed1;
    --ready: #5ecfa6;
    --ready-tint: #12302a;
    --caution: #f2bd57;
    --caution-tint: #33280f;
    --hold: #ff9872;
    --hold-tint: #3b1e14;
  }
}
*, *::before, *::after { box-sizing: border-box; }
html { -webkit-text-size-adjust: 100%; }
body {
  margin: 0;
  background: var(--ground);
  color: var(--ink);
  font: 400 1rem/1.55 system-ui, -apple-system, "Segoe UI", "Noto Sans", "Liberation Sans", Arial, sans-serif;
  font-variant-numeric: tabular-nums lining-nums;
  overflow-wrap: anywhere;
}
a { color: var(--accent); text-underline-offset: 0.18em; text-decoration-thickness: 0.06em; }
a:focus-visible, summary:focus-visible, [tabindex]:focus-visible { outline: 3px solid var(--accent); outline-offset: 3px; border-radius: 2px; }
.skip:not(:focus), .unseen { position: absolute; width: 1px; height: 1px; overflow: hidden; clip-path: inset(50%); white-space: nowrap; }
.skip:focus { position: absolute; left: 1rem; top: 1rem; background: var(--surface); padding: 0.5rem 1rem; z-index: 1; }
.sheet { max-width: 76rem; margin: 0 auto; padding: 0 clamp(1rem, 4vw, 3rem) 4rem; }
h1, h2, h3, p, dl, dd, figure, ul, ol { margin: 0; }
h1, h2, h3 { line-height: 1.2; text-wrap: balance; }
ul, ol { padding-left: 1.2em; }
.muted { color: var(--muted); }
.small { font-size: 0.875rem; }
.code { font-family: var(--mono); font-size: 0.875em; }
.number { text-align: right; white-space: nowrap; }

/* top */
.top { display: flex; flex-wrap: wrap; justify-content: space-between; align-items: baseline; gap: 0.25rem 2rem; padding: 1.5rem 0 1rem; }
.mark { font-weight: 700; letter-spacing: 0.01em; }
.top nav ul { display: flex; flex-wrap: wrap; gap: 0.15rem 1.1rem; list-style: none; padding: 0; font-size: 0.875rem; }
.top nav a { display: inline-block; padding: 0.2rem 0; text-decoration: none; }
.top nav a:hover { text-decoration: underline; }

/* verdict */
.verdict { background: var(--surface); border: 1px solid var(--rule); border-top: 6px solid var(--tone); border-radius: 3px; padding: clamp(1.25rem, 3vw, 2.25rem); }
.verdict-grid { display: grid; gap: 1.5rem clamp(1.5rem, 4vw, 3.5rem); grid-template-columns: minmax(0, 1.15fr) minmax(0, 1fr); align-items: start; }
.verdict h1 { font-size: clamp(1.05rem, 2.4vw, 1.25rem); font-weight: 600; color: var(--muted); margin-bottom: 0.9rem; }
.verdict-word { display: flex; align-items: center; gap: 0.9rem; color: var(--tone); font-size: clamp(2.4rem, 7vw, 3.6rem); font-weight: 700; letter-spacing: -0.02em; line-height: 1; }
.verdict-word svg { width: 0.95em; height: 0.95em; flex: none; }
.advice { font-size: clamp(1.05rem, 2.2vw, 1.25rem); line-height: 1.45; margin-top: 1rem; max-width: 34em; }
.ready { --tone: var(--ready); --tint: var(--ready-tint); }
.caution { --tone: var(--caution); --tint: var(--caution-tint); }
.hold { --tone: var(--hold); --tint: var(--hold-tint); }
.score-head { display: flex; flex-wrap: wrap; gap: 0.5rem 2.5rem; }
.score-head div { display: flex; flex-direction: column-reverse; }
.score-head dt { color: var(--muted); font-size: 0.875rem; }
.score-head dd { font-size: 2rem; font-weight: 650; line-height: 1.15; letter-spacing: -0.01em; }
.score-head dd small { font-size: 0.9rem; font-weight: 400; color: var(--muted); letter-spacing: 0; }
.scale { display: block; width: 100%; height: auto; margin: 0.6rem 0 0.9rem; overflow: visible; }
.taken { list-style: none; padding: 0; display: grid; gap: 0.3rem; font-size: 0.875rem; }
.taken li { display: grid; grid-template-columns: minmax(0, 1fr) 5.5rem 2.2rem; gap: 0.75rem; align-items: center; }
.bar { display: block; height: 0.5rem; background: var(--tone, var(--accent)); border-radius: 1px; min-width: 2px; }
.facts { display: grid; grid-template-columns: repeat(auto-fit, minmax(min(100%, 19rem), 1fr)); gap: 0.6rem 2rem; margin-top: 1.75rem; padding-top: 1.25rem; border-top: 1px solid var(--rule); font-size: 0.9rem; }
.facts dt { color: var(--muted); font-size: 0.8rem; }

/* sections: their headings stand in the margin where there is one */
.section { padding-top: 2.25rem; margin-top: 2.25rem; border-top: 1px solid var(--rule); }
.section > h2 { font-size: 1.15rem; font-weight: 650; margin-bottom: 1rem; scroll-margin-top: 1rem; }
.section > div > * + * { margin-top: 1rem; }
@media (min-width: 68rem) {
  .section { display: grid; grid-template-columns: 11rem minmax(0, 1fr); gap: 0 3rem; }
  .section > h2 { position: sticky; top: 1.5rem; align-self: start; margin: 0; }
}
.lead { max-width: 46em; }
.note { background: var(--tint, var(--surface)); border-left: 4px solid var(--tone, var(--accent)); padding: 0.7rem 1rem; max-width: 46em; }

/* tables */
.scroll { overflow-x: auto; max-width: 100%; }
table { border-collapse: collapse; width: 100%; font-size: 0.9rem; background: var(--surface); border: 1px solid var(--rule); }
caption { text-align: left; font-weight: 600; padding: 0 0 0.5rem; font-size: 1rem; }
th, td { text-align: left; vertical-align: top; padding: 0.42rem 0.75rem; border-top: 1px solid var(--rule); overflow-wrap: normal; }
thead th { border-top: 0; color: var(--muted); font-weight: 500; font-size: 0.8rem; white-space: nowrap; }
tbody th { font-weight: 500; }
tbody th.sub { padding-left: 1.75rem; font-weight: 400; color: var(--muted); }
th.number, td.number { text-align: right; }
.stacks th, .stacks td { overflow-wrap: anywhere; }
.stacks td:nth-child(2) { min-width: 8.5rem; }
.stacks .number { padding-left: 0.5rem; overflow-wrap: normal; }
.stacks th:first-child { overflow-wrap: break-word; }
.scroll + p { margin-top: 0.5rem; }
.tables { columns: 2 24rem; column-gap: 2rem; }
.tables > * { break-inside: avoid; padding-bottom: 2rem; }
.tables > .full { column-span: all; }
.flag-id { display: inline-block; white-space: nowrap; font-weight: 700; font-size: 1rem; border: 1.5px solid currentColor; border-radius: 2px; padding: 0 0.4rem; color: var(--suggested-text); }

/* what limits */
.limits { list-style: none; padding: 0; display: grid; gap: 0.9rem; max-width: 56rem; }
.limits li { display: grid; grid-template-columns: 1.5rem 5rem minmax(0, 1fr); gap: 0 0.75rem; align-items: baseline; }
.limits .rank { color: var(--muted); }
.limits .allows { font-weight: 650; font-size: 1.15rem; text-align: right; }
.limits .reach { grid-column: 2 / -1; height: 0.3rem; background: var(--rule); border-radius: 1px; margin-top: 0.35rem; }
.limits .reach span { display: block; height: 100%; border-radius: 1px; background: var(--hold); }
.limits .enough .reach span { background: var(--ready); }

/* findings */
.finding { background: var(--surface); border: 1px solid var(--rule); border-left: 6px solid var(--tone); border-radius: 3px; padding: 1.1rem 1.35rem 1.25rem; break-inside: avoid; }
.finding-head { display: flex; flex-wrap: wrap; gap: 0.15rem 0.7rem; align-items: center; }
.finding h3 { font-size: 1.12rem; font-weight: 650; flex: 1 1 16rem; }
.tag { display: inline-flex; align-items: center; gap: 0.4rem; color: var(--tone); background: var(--tint); font-weight: 650; font-size: 0.875rem; padding: 0.12rem 0.6rem 0.12rem 0.4rem; border-radius: 2px; }
.tag svg { width: 1.05em; height: 1.05em; flex: none; }
.where { color: var(--muted); margin-top: 0.2rem; }
.in-image { font-size: 1.05rem; margin-top: 0.7rem; max-width: 44em; }
.finding-grid { display: grid; grid-template-columns: minmax(0, 1fr) minmax(0, 16rem); gap: 0.5rem 2.5rem; align-items: start; margin-top: 0.8rem; }
.pairs { display: grid; grid-template-columns: 6rem minmax(0, 1fr); gap: 0.35rem 0.75rem; font-size: 0.925rem; }
.pairs dt { color: var(--muted); }
.gauge svg { display: block; width: 100%; height: auto; overflow: visible; }
.gauge p { font-size: 0.8rem; color: var(--muted); }
.gauge .value { font-size: 1.3rem; font-weight: 650; color: var(--ink); line-height: 1.3; }
details { font-size: 0.925rem; }
summary { cursor: pointer; color: var(--accent); padding: 0.35rem 0; }
.within { display: grid; gap: 0.35rem; list-style: none; padding: 0; font-size: 0.925rem; margin-top: 0.75rem; }

/* plots */
.plots { display: grid; gap: 2.25rem clamp(1.5rem, 3vw, 2.5rem); grid-template-columns: repeat(auto-fit, minmax(min(100%, 26rem), 1fr)); align-items: start; }
figure { container-type: inline-size; break-inside: avoid; }
figure h3 { font-size: 1rem; font-weight: 650; margin-bottom: 0.15rem; }
figcaption { font-size: 0.875rem; color: var(--muted); margin-top: 0.35rem; }
.chart { display: block; width: 100%; height: auto; background: var(--surface); border: 1px solid var(--rule); border-radius: 2px; font: 400 13px system-ui, -apple-system, "Segoe UI", "Noto Sans", "Liberation Sans", Arial, sans-serif; font-variant-numeric: tabular-nums; color: var(--ink); overflow: hidden; }
@container (max-width: 24rem) { .chart { font-size: 15px; } }
.chart text { font-size: inherit; }
.chart .halo { paint-order: stroke; stroke: var(--surface); stroke-width: 4px; stroke-linejoin: round; }
.chart path[d$="z"], .chart rect { shape-rendering: crispEdges; }
.chart .gap path { fill: var(--limit); fill-opacity: 0.1; stroke: var(--limit); stroke-opacity: 0.75; stroke-dasharray: 4 3; shape-rendering: auto; }
.legend { display: flex; flex-wrap: wrap; gap: 0.2rem 1.1rem; list-style: none; padding: 0; margin: 0.5rem 0 0; font-size: 0.85rem; }
.legend li { display: inline-flex; align-items: center; gap: 0.45rem; }
.key { width: 1.1rem; height: 0.7rem; flex: none; border-radius: 1px; background: var(--key); }
.key.dot { width: 0.6rem; height: 0.6rem; border-radius: 50%; }
.key.area { border: 1.5px dashed var(--key); background: color-mix(in srgb, var(--key) 14%, transparent); }
.key.line { height: 0; border-top: 2px dashed var(--key); background: none; border-radius: 0; }
.key.hatch { background: repeating-linear-gradient(135deg, var(--key) 0 2px, transparent 2px 5px); border: 1px solid var(--key); }
.ramp { display: flex; align-items: center; gap: 0.6rem; margin-top: 0.5rem; font-size: 0.85rem; }
.ramp span.colours { flex: 1 1 auto; max-width: 16rem; height: 0.8rem; border: 1px solid var(--rule); background: linear-gradient(90deg, #0072b2, transparent 50%, #d55e00), var(--surface); }

footer { margin-top: 3rem; padding-top: 1.25rem; border-top: 1px solid var(--rule); font-size: 0.875rem; color: var(--muted); }
.plain { padding-left: 1.1em; display: grid; gap: 0.35rem; max-width: 50em; }

@media screen and (max-width: 52rem) {
  .verdict-grid, .finding-grid { grid-template-columns: minmax(0, 1fr); }
  .stacks, .stacks tbody, .stacks tr, .stacks th, .stacks td { display: block; }
  .stacks thead { position: absolute; clip-path: inset(50%); width: 1px; height: 1px; overflow: hidden; }
  .stacks tr { padding: 0.75rem 0; border-top: 1px solid var(--rule); }
  .stacks tr:first-child { border-top: 0; }
  .stacks th, .stacks td { border: 0; padding: 0.12rem 0.9rem; text-align: left; min-width: 0; white-space: normal; }
  .stacks td[data-head]::before { content: attr(data-head) ": "; color: var(--muted); }
  .pairs { grid-template-columns: minmax(0, 1fr); gap: 0.1rem; }
  .pairs dt { margin-top: 0.4rem; font-size: 0.85rem; }
}
@media screen and (max-width: 30rem) {
  th, td { padding: 0.4rem 0.5rem; }
  .finding { padding: 0.9rem 1rem; }
  .limits li { grid-template-columns: 1.2rem minmax(0, 1fr); }
  .limits .allows { text-align: left; }
  .limits .cause, .limits .reach { grid-column: 2 / -1; }
}
@media print {
  :root {
    color-scheme: light;
    --ground: #ffffff; --surface: #ffffff; --ink: #000000; --muted: #444444; --rule: #bbbbbb; --accent: #003f66;
    --kept: #0072b2; --suggested: #d55e00; --suggested-text: #8f3e00; --flagged: #9aa5b1; --bad: #4a5561;
    --limit: #aa3d80; --limit-text: #7d2459;
    --ready: #00513e; --ready-tint: #ffffff; --caution: #6b4300; --caution-tint: #ffffff; --hold: #8a2a03; --hold-tint: #ffffff;
  }
  @page { margin: 16mm 14mm; }
  body { font-size: 9.5pt; print-color-adjust: exact; -webkit-print-color-adjust: exact; }
  .sheet { max-width: none; }
  .skip, .top nav { display: none; }
  .section { display: block; margin-top: 1.2rem; padding-top: 1rem; }
  .section > h2 { position: static; margin-bottom: 0.6rem; break-after: avoid; }
  h3, caption { break-after: avoid; }
  .plots { grid-template-columns: 1fr 1fr; gap: 1rem; }
  .verdict-grid { grid-template-columns: 1.15fr 1fr; }
  tr, .limits li { break-inside: avoid; }
  th, td { padding: 0.2rem 0.5rem; }
  thead { display: table-row-group; }
  thead tr { break-after: avoid; }
  .tables { columns: 2; }
  .finding-grid { grid-template-columns: minmax(0, 1fr) 12rem; gap: 0.5rem 1.5rem; }
  .verdict, .finding { padding: 0.8rem 1rem; }
  .plots h3, figcaption { font-size: 8.5pt; }
  .sheet { padding: 0; }
  .scroll { overflow: visible; }
  details::details-content { content-visibility: visible; height: auto; opacity: 1; }
  a { color: inherit; text-decoration: none; }
}
`;

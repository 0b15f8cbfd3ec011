/** The look of the index page beyond that of the reports. */
export const NIGHTS_STYLE = `
[hidden] { display: none !important; }
.filters { display: flex; flex-wrap: wrap; gap: 0.75rem 1.25rem; align-items: end; margin-bottom: 1.25rem; }
.filters label { display: grid; gap: 0.15rem; font-size: 0.8rem; color: var(--muted); }
.filters select, .filters input, .filters button { font: inherit; font-size: 0.95rem; color: var(--ink); background: var(--surface); border: 1px solid var(--muted); border-radius: 3px; padding: 0.35rem 0.5rem; max-width: 16rem; }
.filters button { color: var(--accent); cursor: pointer; }
.filters :focus-visible { outline: 3px solid var(--accent); outline-offset: 2px; }
.nights { list-style: none; padding: 0; display: grid; gap: 0.5rem; }
.night { display: grid; grid-template-columns: 7rem minmax(0, 1fr); gap: 0 1rem; padding-top: 0.5rem; border-top: 1px solid var(--rule); }
.night h3 { font-size: 0.95rem; font-weight: 650; padding-top: 0.35rem; }
.night h3 small { display: block; font-weight: 400; font-size: 0.8rem; color: var(--muted); }
.tiles { list-style: none; padding: 0; display: grid; grid-template-columns: repeat(auto-fill, minmax(min(100%, 11.5rem), 1fr)); gap: 0.5rem; }
.tile { background: var(--surface); border: 1px solid var(--rule); border-left: 5px solid var(--tone); border-radius: 3px; }
.tile.unreadable { --tone: var(--bad); }
.tile > :is(a, div) { display: grid; grid-template-columns: auto minmax(0, 1fr) auto; gap: 0.1rem 0.5rem; align-items: center; padding: 0.45rem 0.65rem 0.5rem; color: inherit; text-decoration: none; height: 100%; align-content: start; }
.tile > a:hover .tile-name { text-decoration: underline; }
.tile svg { width: 1.15rem; height: 1.15rem; color: var(--tone); }
.tile-name { font-weight: 600; overflow: hidden; text-overflow: ellipsis; white-space: nowrap; }
.tile-score { font-weight: 650; }
.tile-verdict { grid-column: 2 / -1; font-size: 0.8rem; color: var(--tone); font-weight: 650; }
.tile-cause { grid-column: 2 / -1; font-size: 0.8rem; color: var(--muted); display: -webkit-box; -webkit-line-clamp: 3; line-clamp: 3; -webkit-box-orient: vertical; overflow: hidden; }
.counts { display: flex; flex-wrap: wrap; gap: 0.5rem 2rem; margin-top: 1.2rem; }
.counts div { display: flex; align-items: center; gap: 0.5rem; color: var(--tone, var(--ink)); font-size: 1.1rem; }
.counts strong { font-size: 1.6rem; }
.counts svg { width: 1.3rem; height: 1.3rem; }
.plots figure { max-width: 36rem; }
.alarms { list-style: none; padding: 0; display: grid; gap: 0.5rem; }
.alarms li { background: var(--surface); border: 1px solid var(--rule); border-left: 5px solid var(--limit); border-radius: 3px; padding: 0.6rem 0.9rem; }
@media screen and (max-width: 40rem) { .night { grid-template-columns: minmax(0, 1fr); } .night h3 small { display: inline; margin-left: 0.6rem; } }
@media print { .filters { display: none; } .tile-cause { -webkit-line-clamp: none; line-clamp: none; display: block; } .night { break-inside: avoid; } }
`;

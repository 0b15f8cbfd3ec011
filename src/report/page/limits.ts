/** What limits the image, worst first, each against the dynamic range that the plan asks for. */
import { formatRatio } from "../quantity.ts";
import type { Check } from "../report.ts";
import type { ScopeWords } from "../scope.ts";
import { sentence } from "../words.ts";
import { html, type Markup } from "./markup.ts";
import { section } from "./parts.ts";

export function limitsSection(check: Check, words: ScopeWords): Markup {
  const { limits } = check.image;
  const planned = check.plan.dynamicRange.value;
  if (limits.length === 0) {
    return section(
      "limits",
      "What limits this image",
      html`<p>No cause that limits the dynamic range was found.</p>`,
    );
  }
  return section(
    "limits",
    "What limits this image",
    html`<p class="lead">The dynamic range, peak over rms, that each cause alone allows. The plan asks for
<strong>${formatRatio(planned)}</strong>; a full bar reaches it. Bars are logarithmic from 1.</p>
<ol class="limits">${limits.map((limit, i) => {
      const allowed = limit.dynamicRangeFraction;
      const enough = allowed >= planned;
      return html`<li${enough && html` class="enough"`}><span class="rank" aria-hidden="true">${i + 1}</span><span class="allows">${formatRatio(allowed)}</span><span class="cause">${sentence(words.named(limit.text))}${enough && " Enough for the plan."}</span><span class="reach" aria-hidden="true"><span style="width:${reachPercent(allowed, planned)}%"></span></span></li>\n`;
    })}</ol>`,
  );
}

function reachPercent(allowed: number, planned: number): number {
  const share = Math.log(Math.max(allowed, 1)) / Math.log(Math.max(planned, 1.0001));
  return Number.isFinite(share) ? Math.round(100 * Math.min(1, Math.max(0.01, share))) : 100;
}

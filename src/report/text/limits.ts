/** What limits the image, worst first. */
import { formatRatio } from "../quantity.ts";
import type { Check } from "../report.ts";
import type { ScopeWords } from "../scope.ts";
import { sentence } from "../words.ts";
import type { Paper } from "./paper.ts";

export function limitsSection(paper: Paper, check: Check, words: ScopeWords): void {
  const { limits } = check.image;
  const planned = check.plan.dynamicRange.value;
  paper.heading("What limits this image");
  if (limits.length === 0) {
    paper.prose("No cause that limits the dynamic range was found.");
    return;
  }
  paper.prose(
    `Dynamic range, peak over rms, that each cause alone allows. Planned: ${formatRatio(planned)}.`,
  );
  paper.table(
    [
      { head: "Rank", numeric: true },
      { head: "Allows", numeric: true, ink: paper.ink.strong },
      { head: "Cause", numeric: false },
    ],
    limits.map((limit, i) => {
      const enough = limit.dynamicRangeFraction >= planned ? " Enough for the plan." : "";
      return [
        String(i + 1),
        formatRatio(limit.dynamicRangeFraction),
        sentence(words.named(limit.text)) + enough,
      ];
    }),
  );
}

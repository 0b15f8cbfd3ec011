/** `visvet triage`: from a bad image, or a described symptom, back to the samples. */
import { SYMPTOM_LOOKS, SYMPTOM_WORDS } from "../triage/symptoms/symptom.ts";
import { command } from "./command.ts";
import type { TriageOptions } from "./run-triage.ts";

const LOOKS = SYMPTOM_WORDS.map((word) => `  ${word.padEnd(16)} ${SYMPTOM_LOOKS[word]}`).join("\n");

export const triage = command<TriageOptions>({
  command: "triage <dataset>",
  describe: "Rank the causes of a bad image by evidence in the data, and name the samples",
  examples: [
    ["triage night12.uvfits --image night12.fits", "what is wrong with the image, and why"],
    ["triage night12.uvfits --symptom stripes", "the same from what an image looks like"],
  ],
  options: (yargs) =>
    yargs
      .positional("dataset", {
        type: "string",
        demandOption: true,
        describe: "The data the image was made from",
      })
      .option("image", { type: "string", requiresArg: true, describe: "The image, a FITS file" })
      .option("symptom", {
        type: "string",
        requiresArg: true,
        describe: `What the image looks like: ${SYMPTOM_WORDS.join(", ")}`,
      })
      .option("plan", { type: "string", requiresArg: true, describe: "The image you planned, a YAML file" })
      .option("out", {
        type: "string",
        requiresArg: true,
        describe: "Folder for the reports and flags [default: visvet-triage-<dataset name>]",
      })
      .option("rules", {
        type: "string",
        array: true,
        requiresArg: true,
        describe: "Folders of rule files that add to ours, or replace them by id",
      })
      .option("field", {
        type: "string",
        requiresArg: true,
        describe: "The field of the image, by its id or name",
      })
      .option("quiet", { type: "boolean", default: false, describe: "Print the outcome alone" })
      .epilogue(`Symptoms:\n${LOOKS}`),
  handler: async (given) => {
    const { runTriage } = await import("./run-triage.ts");
    process.exitCode = await runTriage(given);
  },
});

/** Symptoms as users write them. */
import { InputError, nearest } from "../../util/errors.ts";
import { SYMPTOM_WORDS, type SymptomWord } from "./symptom.ts";

/** @throws InputError that lists the words, with the nearest one */
export function symptomNamed(word: string): SymptomWord {
  const found = SYMPTOM_WORDS.find((one) => one === word);
  if (found !== undefined) return found;
  const near = nearest(word, SYMPTOM_WORDS);
  const meant = near === undefined ? "" : `Did you mean ${near}? `;
  throw new InputError(
    `--symptom ${word}: unknown symptom`,
    {},
    `${meant}Symptoms: ${SYMPTOM_WORDS.join(", ")}`,
  );
}

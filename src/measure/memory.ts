/** Of the memory that the user grants the program, what goes to a survey. */

/** Bytes that the program may take where the user says nothing. */
export const DEFAULT_MEMORY = 1e9;
/** Of all. The rest is for the program itself, its threads' buffers, and the passes after the survey. */
const SURVEY_SHARE = 0.25;

/**
 * Bytes that the state of a survey may take. It settles what shares sketches and bins, so it follows from the user's
 * bound alone, and not from how many threads there are.
 */
export function surveyMemory(memory: number): number {
  return Math.floor(SURVEY_SHARE * memory);
}

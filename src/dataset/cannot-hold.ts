/** A place for flags in a file that has no room for the flags at hand: another place may have. */
export class CannotHoldFlags extends Error {
  /** what to do instead, a sentence without its full stop */
  readonly advice: string | undefined;

  /** @param why a clause, such as "the weights are integers without a sign" */
  constructor(why: string, advice?: string) {
    super(why);
    this.name = "CannotHoldFlags";
    this.advice = advice;
  }
}

/** What is wrong with a text of the rule language, and at which of its characters. */
export class ExpressionError extends Error {
  /** from 0 */
  readonly at: number;

  constructor(found: string, at: number) {
    super(found);
    this.name = "ExpressionError";
    this.at = at;
  }
}

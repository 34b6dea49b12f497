/** A filter that cannot be made as asked, in words for the person who asked. */
export class DesignError extends Error {
  readonly problem: string;
  readonly given: string;
  readonly allowed: string;
  readonly todo: string;
  constructor(words: { problem: string; given: string; allowed: string; todo: string }) {
    super(words.problem);
    this.name = "DesignError";
    this.problem = words.problem;
    this.given = words.given;
    this.allowed = words.allowed;
    this.todo = words.todo;
  }
}

import { readNumber } from "./number-cell.ts";

/** The codes that stand for a missing value; an empty cell always does. */
export class MissingCodes {
  private readonly numbers = new Set<number>();
  private readonly words = new Set<string>();

  /** @param codes  numbers match in every spelling, words in upper or lower case */
  constructor(codes: readonly string[]) {
    for (const code of codes) {
      const value = readNumber(code.trim(), ".");
      if (Number.isNaN(value)) this.words.add(code.trim().toLowerCase());
      else this.numbers.add(value);
    }
  }

  /** Asked only of cells that are not numbers. */
  isWord(cell: string): boolean {
    return cell === "" || (this.words.size > 0 && this.words.has(cell.toLowerCase()));
  }

  isNumber(value: number): boolean {
    return this.numbers.size > 0 && this.numbers.has(value);
  }
}

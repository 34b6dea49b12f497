/** Kinds of text: names that become file names and column names, and free text. */
import { type Kind, type KindFacts, Misfit, makeKind, shown } from "./kind.ts";

const NAME_PATTERN = String.raw`^[\p{L}\p{N}_](?:[\p{L}\p{M}\p{N}_. \-]*[\p{L}\p{M}\p{N}_\-])?$`;
const NAME = new RegExp(NAME_PATTERN, "u");
const LONGEST_NAME = 60;
const NAME_WORDS = `letters, digits, _ - . and blanks inside, beginning with a letter, a digit or _, at most ${LONGEST_NAME}`;

/** Why a text is no usable name; null when it is one. */
export function nameMisfit(text: string): Misfit | null {
  if (NAME.test(text) && text.length <= LONGEST_NAME && text !== "__proto__") return null;
  const mended = text
    .replace(/[^\p{L}\p{M}\p{N}_. -]+/gu, "-")
    .replace(/^[^\p{L}\p{N}_]+|[^\p{L}\p{M}\p{N}_]+$/gu, "")
    .slice(0, LONGEST_NAME);
  return new Misfit("the name has characters that file and column names cannot have, or is too long", {
    code: "bad-name",
    given: shown(text),
    allowed: NAME_WORDS,
    todo:
      NAME.test(mended) && mended !== "__proto__" ? `write for instance ${mended}` : "choose another name",
  });
}

/** A name that may become a file name or a column name. */
export function name(o: { readonly about: string; readonly example?: string }): Kind<string> {
  const facts: KindFacts = {
    kind: "name",
    about: o.about,
    allowed: NAME_WORDS,
    example: o.example ?? "level",
    json: () => ({
      type: "string",
      pattern: NAME_PATTERN,
      maxLength: LONGEST_NAME,
      not: { const: "__proto__" },
    }),
  };
  return makeKind<string>(facts, (value) => {
    if (typeof value !== "string") return notText(value, facts);
    return nameMisfit(value) ?? { is: value };
  });
}

interface TextTold {
  readonly about: string;
  readonly example: string;
  readonly longest?: number;
  /** One line without control characters. */
  readonly line?: boolean;
  /** Takes numbers too, as the text that they stand for. */
  readonly numbers?: boolean;
}

const ONE_LINE = String.raw`^(?=.*\S)\P{Cc}+$`;
const NOT_BLANK = String.raw`\S`;

/** Free text, not blank. */
export function text(o: TextTold): Kind<string> {
  const longest = o.longest ?? 1000;
  const facts: KindFacts = {
    kind: "text",
    about: o.about,
    allowed: `a text of 1 to ${longest} characters${o.line === true ? " on one line" : ""}`,
    example: o.example,
    json: () => ({
      type: o.numbers === true ? ["string", "number"] : "string",
      pattern: o.line === true ? ONE_LINE : NOT_BLANK,
      maxLength: longest,
    }),
  };
  return makeKind<string>(facts, (value) => {
    if (typeof value === "number" && o.numbers === true) return { is: String(value) };
    if (typeof value !== "string") return notText(value, facts);
    const blank = value.trim() === "";
    const broken = o.line === true && /\p{Cc}/u.test(value);
    if (!blank && !broken && value.length <= longest) return { is: value };
    return new Misfit(
      blank
        ? "the text is empty"
        : broken
          ? "the text has a line break or another control character"
          : "the text is too long",
      {
        code: "bad-text",
        given: shown(value),
        allowed: facts.allowed,
        todo: blank ? `write for instance ${o.example}` : broken ? "write it on one line" : "shorten it",
      },
    );
  });
}

function notText(value: unknown, facts: KindFacts): Misfit {
  const scalar = typeof value === "number" || typeof value === "boolean";
  return new Misfit(`a ${facts.kind} is meant here`, {
    code: "wrong-type",
    given: scalar ? `${shown(value)} (read as a ${typeof value})` : shown(value),
    allowed: facts.allowed,
    todo: scalar ? `put it in quotes: "${String(value)}"` : `write for instance ${facts.example}`,
  });
}

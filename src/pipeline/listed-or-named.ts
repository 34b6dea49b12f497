/** A list of numbers, or the published name of one. */
import { type Kind, type KindFacts, Misfit, makeKind, shown } from "./kind.ts";
import type { Told } from "./told.ts";

interface ListedOrNamedTold extends Told<string> {
  readonly max: number;
  /** Pattern of the names, and some of them for people. */
  readonly names: string;
  readonly such: readonly string[];
}

export function listedOrNamed(o: ListedOrNamedTold): Kind<readonly number[] | string> {
  const pattern = new RegExp(`^(?:${o.names})$`);
  const facts: KindFacts = {
    kind: "list of numbers, or a name",
    about: o.about,
    allowed: `1 to ${o.max} numbers, or a name such as ${o.such.join(", ")}`,
    example: o.such[0]!,
    json: () => ({
      anyOf: [
        { type: "array", items: { type: "number" }, minItems: 1, maxItems: o.max },
        { type: "string", pattern: pattern.source },
      ],
    }),
  };
  return makeKind<readonly number[] | string>(facts, (value) => {
    if (typeof value === "string" && pattern.test(value)) return { is: value };
    if (Array.isArray(value) && value.length > 0 && value.length <= o.max && value.every(Number.isFinite))
      return { is: value as number[] };
    return new Misfit("this is neither a list of numbers nor a known name", {
      code: "not-a-choice",
      given: shown(value),
      allowed: facts.allowed,
      todo: `write for instance ${o.such[0]}, or [1, 2, 1]`,
    });
  });
}

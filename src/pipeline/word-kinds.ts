/** Kinds of words: a choice, true or false. */
import { nearestName } from "../diagnostics.ts";
import { type Kind, type KindFacts, Misfit, makeKind, shown, wrongType } from "./kind.ts";
import { type Told, withDefault } from "./told.ts";

/** One of some words. */
export function oneOf<const V extends string>(values: readonly V[], o: Told<NoInfer<V>>): Kind<V> {
  const facts: KindFacts = {
    kind: "choice",
    about: o.about,
    ...withDefault(o.default),
    allowed: values.join(", "),
    example: o.example ?? o.default ?? values[0]!,
    json: () => ({ enum: [...values] }),
  };
  return makeKind<V>(
    facts,
    (value) => {
      const found = values.find((v) => v === value);
      if (found !== undefined) return { is: found };
      if (typeof value === "object") return wrongType(value, "one of some words", facts);
      const near = nearestName(String(value), values);
      return new Misfit("this is not one of the choices", {
        code: "not-a-choice",
        given: shown(value),
        allowed: facts.allowed,
        todo: `write ${near ?? (values.length === 1 ? values[0] : "one of them")}`,
      });
    },
    o.default,
  );
}

/** One of some signs, each with the words that may stand for it; gives the sign. */
export function sign(words: ReadonlyMap<string, string>, o: Told<string>): Kind<string> {
  const facts: KindFacts = {
    kind: "sign",
    about: o.about,
    ...withDefault(o.default),
    allowed: [...words.keys()].filter((word) => word.trim() !== "").join("  "),
    example: o.example ?? o.default ?? [...words.keys()][0]!,
    json: () => ({ enum: [...words.keys()] }),
  };
  return makeKind<string>(
    facts,
    (value) => {
      const is = typeof value === "string" ? words.get(value) : undefined;
      if (is !== undefined) return { is };
      return new Misfit("this is not one of the signs", {
        code: "not-a-choice",
        given: shown(value),
        allowed: facts.allowed,
        todo: "write one of them, in quotes",
      });
    },
    o.default,
  );
}

/** true or false. */
export function truth(o: Told<boolean>): Kind<boolean> {
  const facts: KindFacts = {
    kind: "true or false",
    about: o.about,
    ...withDefault(o.default),
    allowed: "true, false",
    example: o.example ?? String(o.default ?? true),
    json: () => ({ type: "boolean" }),
  };
  return makeKind<boolean>(
    facts,
    (value) => {
      if (typeof value === "boolean") return { is: value };
      const word = String(value).toLowerCase();
      const meant = /^(yes|on|y|1|true)$/.test(word)
        ? "true"
        : /^(no|off|n|0|false)$/.test(word)
          ? "false"
          : "true or false";
      return new Misfit("this is not true or false", {
        code: "wrong-type",
        given: shown(value),
        allowed: facts.allowed,
        todo: `write ${meant}${value === meant ? " without quotes" : ""}`,
      });
    },
    o.default,
  );
}

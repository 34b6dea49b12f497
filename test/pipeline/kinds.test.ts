import { describe, expect, expectTypeOf, test } from "vitest";
import type { z } from "zod";
import { settingsOf } from "../../src/pipeline/describe-schema.ts";
import {
  count,
  duration,
  factsOf,
  list,
  oneOf,
  percent,
  record,
  stageSettings,
  truth,
} from "../../src/pipeline/kinds.ts";
import type { Duration } from "../../src/pipeline/quantities.ts";

const settings = stageSettings("try", {
  points: count({ min: 1, max: 9, about: "Points." }),
  over: duration({ about: "Length." }).optional(),
  share: percent({ default: "80 %", about: "Share." }),
  reach: oneOf(["both", "past"], { default: "both", about: "Reach." }),
  loud: truth({ default: false, about: "Loud." }),
  sizes: list(count({ min: 0, max: 9, about: "A size." }), { single: true, about: "Sizes." }).optional(),
  parts: record(count({ min: 0, max: 9, about: "A part." }), { about: "Parts." }).optional(),
});
type Settings = z.output<typeof settings>;

describe("a stage's settings", () => {
  test("have the types of their kinds", () => {
    expectTypeOf<Settings["points"]>().toEqualTypeOf<number>();
    expectTypeOf<Settings["over"]>().toEqualTypeOf<Duration | undefined>();
    expectTypeOf<Settings["share"]>().toEqualTypeOf<number>();
    expectTypeOf<Settings["reach"]>().toEqualTypeOf<"both" | "past">();
    expectTypeOf<Settings["loud"]>().toEqualTypeOf<boolean>();
    expectTypeOf<Settings["sizes"]>().toEqualTypeOf<number[] | undefined>();
    expectTypeOf<Settings["parts"]>().toEqualTypeOf<Record<string, number> | undefined>();
    expectTypeOf<Settings["channels"]>().toEqualTypeOf<string[] | undefined>();
  });

  test("get their defaults from the schema", () => {
    expect(settings.parse({ points: 3 })).toEqual({ points: 3, share: 0.8, reach: "both", loud: false });
  });

  test("may take one value for a list of one", () => {
    expect(settings.parse({ points: 3, sizes: 4 })).toMatchObject({ sizes: [4] });
    expect(settings.parse({ points: 3, sizes: [] })).toMatchObject({ sizes: [] });
  });

  test("take no unknown key, and none that hides in a prototype", () => {
    for (const key of ["point", "__proto__", "constructor", "toString"]) {
      const given = JSON.parse(`{"points": 3, "${key}": 1}`);
      expect(settings.safeParse(given).success, key).toBe(false);
    }
    const parts = JSON.parse('{"points": 3, "parts": {"constructor": 1, "valueOf": 2}}');
    expect(Object.entries(settings.parse(parts).parts!)).toEqual([
      ["constructor", 1],
      ["valueOf", 2],
    ]);
  });

  test("say every mistake with what was given, what is allowed and what to do", () => {
    const { error } = settings.safeParse({
      points: 10,
      over: 5,
      share: "x",
      reach: "bath",
      loud: 1,
      sizes: [1, 99],
    });
    const issues = error!.issues.map((i) => [
      i.path.join("."),
      i.code === "custom" ? i.params!["code"] : i.code,
    ]);
    expect(issues).toEqual([
      ["points", "out-of-range"],
      ["over", "no-unit"],
      ["share", "not-a-quantity"],
      ["reach", "not-a-choice"],
      ["loud", "wrong-type"],
      ["sizes.1", "out-of-range"],
    ]);
    for (const issue of error!.issues) {
      expect(issue.message).not.toBe("");
      if (issue.code !== "custom") continue;
      for (const part of ["given", "allowed", "todo"]) expect(issue.params![part], part).toBeTruthy();
    }
  });

  test("carry the facts from which they are documented", () => {
    expect(factsOf(settings.shape.share)).toMatchObject({
      kind: "percentage",
      about: "Share.",
      unit: "%",
      default: "80 %",
      allowed: "a number with %; 0 % or more",
    });
    expect(factsOf(settings.shape.over)).toMatchObject({
      kind: "length of time",
      unit: "us, ms, s, min, h, d, wk",
    });
    expect(settingsOf(settings).map((s) => s.key)).toEqual([
      "points",
      "over",
      "share",
      "reach",
      "loud",
      "sizes",
      "parts",
      "channels",
    ]);
  });
});

test("a default that does not fit its own kind is refused where it is written", () => {
  expect(() => count({ min: 1, max: 9, default: 10, about: "Points." })).toThrow("does not fit");
  expect(() => duration({ default: "10", about: "Length." })).toThrow("does not fit");
});

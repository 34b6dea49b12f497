import { describe, expect, test } from "vitest";
import { stagesCommand, stagesText } from "../../src/cli/stages.ts";
import { STAGES } from "../../src/stages/registry.ts";
import { FAKE_STAGES } from "./fake-stages.ts";

describe("forebay stages", () => {
  test("lists every stage with its sentence", () => {
    const text = stagesText(STAGES)!;
    for (const stage of STAGES.values()) {
      expect(text).toMatch(new RegExp(`^${stage.name} `, "m"));
      expect(text.replace(/\s+/g, " ")).toContain(stage.about);
    }
  });

  test("describes each setting of one: kind, default, sentence, what is allowed", () => {
    expect(stagesText(FAKE_STAGES, "smooth")).toBe(`smooth: A stage of the tests.

  points: whole number; may be left out
    Number of samples.
    Allowed: a whole number from 1 to 99.

  over: length of time or whole; default whole
    Length.
    Allowed: whole; or a number with one of us, ms, s, min, h, d, wk; longer
    than 0 s.

  share: percentage; default 100 %
    Share.
    Allowed: a number with %; from 1 % to 100 %.

  drift: number of parts per million; may be left out
    Drift of the clock.
    Allowed: a number with ppm; from -1000 ppm to 1000 ppm.

  slope: rate of change; may be left out
    Steepest change.
    Allowed: a number above zero, the channel's unit, a slash and a unit of
    time.

  weights: list, each a number; may be left out
    Weights.
    Allowed: a list of 1 to 5, each: a number.

  spike: mapping; may be left out
    What counts as a spike.

  spike.over: length of time; required
    Length.
    Allowed: a number with one of us, ms, s, min, h, d, wk; longer than 0 s.

  spike.deviations: number; required
    How many.
    Allowed: a number 0 or more.

  channels: list, each a name; may be left out
    Channels that the stage works on; all when left out.
    Allowed: a list of at least 1, each: letters, digits, _ - . and blanks
    inside, beginning with a letter, a digit or _, at most 60.
`);
  });

  test.each([undefined, ...STAGES.keys()])("fits a terminal of 80 columns, and one of 50: %s", (name) => {
    for (const width of [80, 50])
      for (const line of stagesText(STAGES, name, width)!.split("\n"))
        expect(line.length).toBeLessThanOrEqual(width);
  });

  test("every setting of every stage has a sentence", () => {
    for (const name of STAGES.keys())
      for (const part of stagesText(STAGES, name, 1000)!.split("\n\n").slice(1)) {
        const [head, about = ""] = part.split("\n");
        expect(about, `${name}: ${head}`).toMatch(/^ {4}[A-Z].*\.$/);
      }
  });

  test("an unknown name is told with the nearest one", () => {
    let said = "";
    const streams = {
      out: () => expect.fail("nothing is to be printed"),
      err: (text: string) => void (said += text),
    };
    expect(stagesCommand("resampel", streams)).toBe(2);
    expect(said).toContain("there is no stage resampel");
    expect(said).toContain("do       forebay stages resample");
  });
});

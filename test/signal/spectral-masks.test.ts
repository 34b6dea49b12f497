import { describe, it } from "vitest";
import { kept } from "./masks.ts";

describe("spectral masks over a grid of edges, transitions, attenuations and ripples", () => {
  const grid = [0.05, 0.17, 0.31].flatMap((edge) =>
    [0.03, 0.09].flatMap((width) =>
      [20, 50, 80].flatMap((attenuation_dB) =>
        [0.01, 0.5].map((ripple_dB) => ({ edge, width, attenuation_dB, ripple_dB })),
      ),
    ),
  );
  it.each(["windowed-sinc", "equiripple", "least-squares", "auto"] as const)("%s", (method) => {
    // auto is one of the others: every third point shows that it is.
    const points = method === "auto" ? grid.filter((_, i) => i % 3 === 0) : grid;
    for (const { edge, width, ...limits } of points) {
      kept({ shape: "low-pass", pass: [edge], stop: [edge + width], ...limits }, method);
      kept({ shape: "high-pass", pass: [edge + width], stop: [edge], ...limits }, method);
      if (limits.ripple_dB > 0.1 && limits.attenuation_dB > 40) continue;
      const [a, b] = [0.02 + edge / 3, 0.02 + edge / 3 + width];
      const [c, d] = [0.45 - width, 0.45];
      kept({ shape: "band-pass", pass: [b, c], stop: [a, d], ...limits }, method);
      kept({ shape: "band-stop", pass: [a, d], stop: [b, c], ...limits }, method, "odd");
    }
  });
});

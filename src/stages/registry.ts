/** All stages, in the order in which people meet them. A new stage adds one line here. */
import { calibrate } from "./calibrate.ts";
import { decimate } from "./decimate.ts";
import { detrend } from "./detrend.ts";
import { fir } from "./fir.ts";
import { movingAverage } from "./moving-average.ts";
import { report } from "./report.ts";
import { resample } from "./resample.ts";
import { screen } from "./screen.ts";
import type { AnyStage } from "./stage.ts";

export const STAGES: ReadonlyMap<string, AnyStage> = new Map(
  [calibrate, screen, resample, detrend, movingAverage, fir, decimate, report].map((stage) => [
    stage.name,
    stage as AnyStage,
  ]),
);

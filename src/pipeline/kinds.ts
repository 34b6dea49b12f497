/** The kinds of settings, one function each; every stage's settings and the pipeline file are made of them. */
export { list, record, stageSettings, strictObject } from "./collections.ts";
export { factsOf, type JsonSchema, type Kind, type KindFacts } from "./kind.ts";
export { count, decibels, finite, percent, ppm } from "./number-kinds.ts";
export {
  duration,
  durationOr,
  durationOrRate,
  frequency,
  instant,
  rate,
  rateOfChange,
} from "./quantity-kinds.ts";
export { name, text } from "./texts.ts";
export { oneOf, sign, truth } from "./word-kinds.ts";

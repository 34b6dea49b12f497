/** Mistakes that the designs of row stages find; see problems.test.ts. */
const on =
  (stage: string) =>
  (settings: Record<string, unknown>, code: string, ...path: string[]) => ({
    stage,
    settings,
    code,
    path,
  });
const screen = on("screen");
const calibrate = on("calibrate");
const never = { from: "2031-01-02", until: "2031-01-01" };
const table = [
  [0, 1],
  [0, 2],
];

export const ROW_MISTAKES = [
  { ...calibrate({ polynomial: [1], table: table.slice(1).concat([[3, 4]]) }, "calibrate-twice", "table") },
  { ...calibrate({ unit: "m" }, "calibrate-nothing"), says: "none of" },
  { ...calibrate({ table }, "table-order", "table"), says: "0 after 0" },
  { ...calibrate({ offset: 1, "sensor-range": [5, 5] }, "empty-range", "sensor-range"), says: "5 to 5" },
  calibrate({ offset: 1, ...never }, "empty-stretch", "until"),
  { ...calibrate({ polynomial: [0, 1], unit: "in" }, "calibrate-again"), converting: "ft", says: "unit in" },
  { ...calibrate({ polynomial: [0, 1] }, "calibrate-again"), converting: "ft", says: "no unit" },
  { ...calibrate({ offset: 1, unit: "ft", from: "1970-01-01" }, "calibrate-again"), converting: "ft" },
  screen({}, "screen-nothing"),
  { ...screen({ range: [6, 0] }, "empty-range", "range"), says: "6 to 0" },
  screen({ range: [0, 6], ...never }, "empty-stretch", "until"),
  { ...screen({ range: [0, 6] }, "screen-mixed-units", "range"), units: ["m", "m3/s"], says: "m, m3/s" },
  { ...screen({ spike: { over: "9 s", floor: 1 } }, "screen-mixed-units", "spike"), units: ["m", "V"] },
  { ...screen({ stuck: { over: "9 s", within: 1 } }, "screen-mixed-units", "stuck"), units: ["m", "V"] },
  {
    ...screen({ "rate-of-change": "0.5 mm/s" }, "rate-unit", "rate-of-change"),
    says: "write for instance 0.5 m/s",
  },
  {
    ...screen({ "rate-of-change": "1 m/s" }, "rate-unit", "rate-of-change"),
    units: ["m", "V"],
    says: "one screen",
  },
  screen({ agree: { with: "zz", within: 1 } }, "unknown-channel", "agree", "with"),
  screen({ agree: { with: "a", within: 1 } }, "agree-alone", "agree", "with"),
  { ...screen({ agree: { with: "b", within: 1 } }, "agree-units", "agree", "with"), units: ["m", "V"] },
  { ...screen({ spike: { over: "3.9 s" } }, "spike-span-below-log", "spike", "over"), log_s: 1 },
  { ...screen({ stuck: { over: "1 s" } }, "stuck-span-below-log", "stuck", "over"), log_s: 2 },
] as const;

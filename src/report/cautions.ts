/** What every report says, whatever the data. */
export const CAUTIONS: readonly string[] = [
  "Cleaned data are not for alarms, trips, interlocks or control.",
  "Centred filters use the future: never read onset times or a sequence of events from them.",
  "Smoothed maxima understate loads, crests and exceedances: use the raw extremes for limits and compliance.",
  "Aliasing inside the logger cannot be undone.",
  "Removing drift can hide settlement, creep or fouling.",
  "Screening can mark a real event.",
  "Local codes and licensed practice come first.",
];

/** Looking into data as it was read from a file, before any schema has judged it. */

export function isMapping(value: unknown): value is Record<string, unknown> {
  return value !== null && typeof value === "object" && !Array.isArray(value);
}

/** The value at a path of the file as it was read; undefined where there is none. */
export function valueAt(data: unknown, path: readonly PropertyKey[]): unknown {
  let value = data;
  for (const step of path) {
    if (Array.isArray(value)) value = value[Number(step)];
    else if (isMapping(value) && Object.hasOwn(value, step)) value = value[step as string];
    else return undefined;
  }
  return value;
}

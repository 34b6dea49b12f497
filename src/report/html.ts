/** HTML as text: everything that comes from the data is escaped. */

const SIGNS: Record<string, string> = { "&": "&amp;", "<": "&lt;", ">": "&gt;", '"': "&quot;", "'": "&#39;" };

/** Text made safe for element content and quoted attributes. */
export function escaped(text: string): string {
  return text.replace(/[&<>"']/g, (sign) => SIGNS[sign]!);
}

/** A table with a caption, a head row and body rows; cells are text and are escaped here. */
export function htmlTable(
  id: string,
  caption: string,
  head: readonly string[],
  rows: readonly (readonly string[])[],
): string {
  const cells = (row: readonly string[]) =>
    row
      .map((cell, i) => (i === 0 ? `<th scope="row">${escaped(cell)}</th>` : `<td>${escaped(cell)}</td>`))
      .join("");
  return `<div class="wide${head.length === 2 ? " pairs" : ""}" tabindex="0" role="region" aria-labelledby="${id}"><table><caption id="${id}">${escaped(caption)}</caption><thead><tr>${head
    .map((h) => `<th scope="col">${escaped(h)}</th>`)
    .join(
      "",
    )}</tr></thead><tbody>${rows.map((row) => `<tr>${cells(row)}</tr>`).join("")}</tbody></table></div>`;
}

/** A name that can be an anchor: letters, digits and dashes; other characters by their code. */
export function anchor(...parts: readonly (string | number)[]): string {
  return parts
    .map((p) =>
      String(p).replace(/[^A-Za-z0-9]/g, (c) => (c === " " ? "-" : `-${c.codePointAt(0)!.toString(16)}`)),
    )
    .join("-");
}

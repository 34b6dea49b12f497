/** A short level log with most of what goes wrong in writing one; every line is explained in README.md. */
const START_ms = Date.UTC(2031, 2, 5, 8);
const at = (second) => new Date(START_ms + 1000 * second).toISOString();
const level = (second) => (6.1 + 0.02 * Math.sin(2 * Math.PI * 0.3 * second)).toFixed(3);
const row = (second) => `${at(second)},${level(second)},3.2${second % 10}`;

/** Seconds 0 to 9 plain, then one trouble after another. Entries are [line, line end]. */
export function makeTrouble() {
  const lines = [["logged_at,LEVEL_M,INFLOW_M3S", "\n"]];
  const put = (text, end = "\n") => lines.push([text, end]);
  const plain = (from, to) => {
    for (let s = from; s <= to; s++) put(row(s));
  };
  plain(0, 9);
  put(row(9)); // line 12: exact duplicate of line 11
  plain(10, 12);
  put(`${at(12)},6.250,3.22`); // line 16: the time of line 15, another level
  plain(13, 13);
  plain(15, 16);
  put(row(14)); // line 20: 2 s late
  plain(17, 17);
  put(`${at(18)},-9999,3.28`); // line 22
  put(`${at(19)},NAN,3.29`); // line 23
  put(`${at(20)},-9999.000,3.20`); // line 24: a code in another spelling
  put(`${at(21)},-9.999e3,3.21`); // line 25: and another
  put(`${at(22)},${level(22)},`); // line 26: empty cell
  put(`${at(23)},,3.23`); // line 27: empty level
  put(`${at(23)},${level(23)},3.23`); // line 28: the same row again, with the level filled in
  plain(24, 24);
  put(""); // line 30: blank line
  put("   "); // line 31: spaces only
  plain(25, 25);
  put(`${at(26)},${level(26)}`); // line 33: one cell too few
  put(`${at(27)},${level(27)},3.27,0.0`); // line 34: one cell too many
  put(`${at(28)},6.1abc,3.28`); // line 35: not a number
  put(`${at(29)},0x1F,3.29`); // line 36: a number to a programmer, not to a logger
  put(`${at(30)},6 .104,3.20`); // line 37: a blank inside
  put(`2031-02-30T08:00:31.000Z,${level(31)},3.21`); // line 38: no such day
  put(`--,${level(32)},3.22`); // line 39: no time at all
  put(`,${level(33)},3.23`); // line 40: empty time
  for (let s = 34; s <= 38; s++) put(row(s), "\r\n"); // lines 41 to 45: other line ends
  plain(39, 40);
  put(`"${at(41)}","${level(41)}","3.21"`); // line 48: quoted cells
  put(` ${at(42)} , ${level(42)} , 3.22 `); // line 49: padded cells
  plain(43, 44);
  put(row(-600)); // line 52: ten minutes late
  plain(45, 46);
  put(`${at(57)},${level(57)},3.27`); // line 55: after ten seconds without rows
  plain(58, 60);
  put(row(60)); // line 59: exact duplicate of line 58
  put(`${at(61)},6.0`, ""); // line 60: cut off in mid-number, no line end
  return {
    files: new Map([["thurnwick/trouble.csv", lines.map(([text, end]) => text + end).join("")]]),
    truth: {
      columns: { logged_at: "ISO 8601 with Z", LEVEL_M: "m", INFLOW_M3S: "m3/s" },
      lines: {
        physical: lines.length,
        exact_duplicates: [12, 59],
        same_time_other_value: [16],
        late: [20],
        far_too_late: [52],
        missing_code_in_level: [22, 23, 24, 25],
        empty_cell: [26, 27],
        fills_the_line_before: [28],
        blank: [30, 31],
        too_few_cells: [33],
        too_many_cells: [34],
        unreadable_level: [35, 36, 37],
        unreadable_time: [38, 39, 40],
        carriage_return: [41, 42, 43, 44, 45],
        quoted: [48],
        padded: [49],
        after_a_gap: [55],
        cut_off: [60],
      },
    },
  };
}

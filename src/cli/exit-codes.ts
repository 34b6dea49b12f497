/** Exit codes of every command. */
export const DONE = 0;
export const FAULT = 1;
export const WRONG = 2;
export const PART_DONE = 3;
export const NOT_MET = 4;
export const HELD = 5;

// With which code does a command end?

export const DONE = 0;
/** Nothing was found, or a number has not the digits asked for. */
export const NOT_FOUND = 1;
/** The options, the file or the device are wrong. */
export const INPUT_WRONG = 2;
/** The program itself is at fault. */
export const INTERNAL_FAULT = 3;
/** Ctrl-C. */
export const INTERRUPTED = 130;

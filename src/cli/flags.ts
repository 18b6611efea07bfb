import type { TerminalStream } from "./progress.ts";

/** What a command writes to and reports its exit code through. */
export interface Context {
  readonly process: {
    readonly stdout: TerminalStream;
    readonly stderr: TerminalStream;
  };
  exitCode: number;
}

/** Exit codes: the whole contract of the command line. */
export const GOOD = 0;
export const NOT_TRUSTED = 1;
export const USAGE = 2;

/** Parses a whole number >= 1. */
export function count(text: string): number {
  const value = Number(text);
  if (!/^\d+(\.\d+)?(e\d+)?$/i.test(text.trim()) || !Number.isSafeInteger(value) || value < 1) {
    throw new SyntaxError(`must be a whole number >= 1, not ${JSON.stringify(text)}`);
  }
  return value;
}

/** A number as people write it: an empty text or a hexadecimal one is none. */
export function decimal(text: string): number {
  if (!/^[+-]?(\d+\.?\d*|\.\d+)(e[+-]?\d+)?$/i.test(text) || !Number.isFinite(Number(text))) {
    throw new SyntaxError(`must be a decimal number, not ${JSON.stringify(text)}`);
  }
  return Number(text);
}

export const text = (value: string): string => value;
export const outFlag = {
  kind: "parsed",
  parse: text,
  brief: "Folder to write into",
  placeholder: "DIR",
  optional: true,
} as const;
export const jsonFlag = {
  kind: "boolean",
  brief: "Print one JSON object on standard output and nothing else",
  default: false,
  withNegated: false,
} as const;
export const setFlag = {
  kind: "parsed",
  parse: text,
  brief: "Override a scenario value, such as sample.temperatureK=77; repeatable",
  placeholder: "PATH=VALUE",
  variadic: true,
  optional: true,
} as const;
export const workersFlag = {
  kind: "parsed",
  parse: count,
  brief: "Worker threads (default: one per processor)",
  placeholder: "N",
  optional: true,
} as const;
export const scenarioArgument = {
  parse: text,
  brief: "Scenario file (JSON)",
  placeholder: "SCENARIO",
} as const;

/** A flag that takes one number. */
export function optionalNumber(
  brief: string,
  placeholder: string,
): { kind: "parsed"; parse: typeof decimal; brief: string; placeholder: string; optional: true } {
  return { kind: "parsed", parse: decimal, brief, placeholder, optional: true };
}

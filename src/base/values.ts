/** A measured or fitted quantity with its standard uncertainty (JCGM 100, 2.3.1), both in the unit the name says. */
export interface Estimate {
  /** Best estimate. */
  readonly value: number;
  /** Standard uncertainty, one standard deviation, never negative. */
  readonly standardUncertainty: number;
}

/** A warning as a value: results carry these, and only the command line prints them. */
export interface Notice {
  /** Stable short identifier in kebab case, for scripts. */
  readonly code: string;
  /** One sentence that says what was found, with numbers. */
  readonly message: string;
  /** Where: a JSON pointer into the scenario, `file:line`, or a region label. */
  readonly place: string;
}

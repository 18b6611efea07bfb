/**
 * Room `fit`: least squares and maximum likelihood for vectors of numbers, with covariance and tests of the residuals.
 * Knows no physics.
 *
 * Counts go to {@link minimizePoisson}, everything with known Gaussian uncertainties to {@link minimize}, straight lines
 * to {@link fitStraightLine}.
 *
 * @module
 */
export { coverageFactor } from "./coverage_factor.ts";
export { correlation, type FitParameter, type FitProblem, type FitResult, minimize } from "./minimize.ts";
export { minimizePoisson, type PoissonFit, type PoissonProblem } from "./poisson.ts";
export { type ProfileInterval, profileInterval } from "./profile.ts";
export {
  chiSquareProbability,
  type ResidualTests,
  residualTests,
  type RunsTest,
  runsTest,
} from "./residual_tests.ts";
export { fitStraightLine, type StraightLine } from "./straight_line.ts";

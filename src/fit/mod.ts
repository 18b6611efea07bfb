/**
 * Room `fit`: least squares and maximum likelihood for vectors of numbers, with covariance and tests of the residuals.
 * Knows no physics.
 *
 * Counts go to {@link minimizePoisson}, everything with known Gaussian uncertainties to {@link minimize}.
 *
 * @module
 */
export { correlation, type FitParameter, type FitProblem, type FitResult, minimize } from "./minimize.ts";
export { minimizePoisson, type PoissonFit, type PoissonProblem } from "./poisson.ts";
export {
  chiSquareProbability,
  type ResidualTests,
  residualTests,
  type RunsTest,
  runsTest,
} from "./residual_tests.ts";

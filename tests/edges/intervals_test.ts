import assert from "node:assert/strict";
import { assertClose } from "../support/assert_close.ts";
import { measureTwoEdges, METAL } from "../support/two_edges.ts";
import { explainFit } from "../../src/edges/mod.ts";

const REPLICATES = 150;
const bootstrap = { replicates: REPLICATES, seed: 1 };

Deno.test("measureWorkFunction() gives intervals by profile and bootstrap that agree with the covariance", () => {
  // Many counts, where all three estimate one thing. A standard deviation of 150 draws scatters by 1/sqrt(2 x 149), 5.8 %:
  // 4.5 of these, one false alarm in 150 000 for each edge; the twin is twice as wide.
  const { cutoffFit, upperFit } = measureTwoEdges(METAL, 1, { options: { profile: true, bootstrap } });
  for (const edge of [cutoffFit!, upperFit!]) {
    const u = edge.positionEv.standardUncertainty;
    const agrees = (deviation: number): boolean => Math.abs(deviation / u - 1) < 4.5 * 0.058;
    assert.ok(
      agrees(edge.bootstrap!.standardDeviationEv) && !agrees(2 * edge.bootstrap!.standardDeviationEv),
    );
    assert.equal(edge.bootstrap!.failures, 0);
    assertClose(edge.profileEv!.upper! - edge.positionEv.value, u, { relative: 0.1 });
    assertClose(edge.positionEv.value - edge.profileEv!.lower!, u, { relative: 0.1 });
  }
});

Deno.test("measureWorkFunction() draws the same bootstrap for the same seed, another for another", () => {
  const run = (seed: number) =>
    measureTwoEdges(METAL, 1, { options: { bootstrap: { replicates: 10, seed } } }).bootstrapWorkFunctionEv;
  assert.deepEqual(run(1), run(1));
  assert.notDeepEqual(run(1), run(2));
  assert.equal(measureTwoEdges(METAL, 1).bootstrapWorkFunctionEv, null);
});

Deno.test("explainFit() names what was taken, how it was fitted, and why it is not good", () => {
  const good = explainFit(measureTwoEdges(METAL, 1)).join("\n");
  for (
    const part of [/photon energy is 21\.218 eV/, /by Poisson likelihood with: step/, /It is a Fermi edge/]
  ) {
    assert.match(good, part);
  }
  assert.match(good, /Nothing speaks against the answer/);
  const patches = explainFit(measureTwoEdges({ ...METAL, patches: [[4.8, 0.5], [5.1, 0.5]] }, 1)).join("\n");
  assert.match(patches, /Two cutoffs describe the counts better/);
  assert.match(patches, /The verdict is doubtful: one step does not describe/);
});

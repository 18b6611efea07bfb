import assert from "node:assert/strict";
import {
  acceptedShare,
  barrierTransmission,
  type DetectionInput,
  type DetectionTable,
  detectionTable,
} from "../../src/transport/mod.ts";
import { assertClose } from "../support/assert_close.ts";
import { integrate } from "../support/integrate.ts";

const radians = (degrees: number): number => (degrees * Math.PI) / 180;

/** Barrier V0 of which `bottom` lies below the Fermi level; everything that passes is accepted. */
function surface(barrierEv: number, bottomEv: number, changes: Partial<DetectionInput> = {}): DetectionInput {
  return {
    grid: { stepEv: 1e-5, count: 1, vacuumBin: 0, thermalBins: 0 },
    workFunctionEv: barrierEv - bottomEv,
    bandBottomBelowFermiEv: bottomEv,
    barrier: "classical",
    accelerationEv: 0,
    acceptanceHalfAngleRad: Math.PI / 2,
    emissionAngleRad: 0,
    cellsPerPath: 1e6,
    deepestPaths: 1e-6,
    ...changes,
  };
}

/** Table of the single bin about an energy above the Fermi level; by default one cell right at the surface. */
function tableAt(energyEv: number, input: DetectionInput): DetectionTable {
  const stepEv = 1e-4;
  const bin = Math.round(energyEv / stepEv - 0.5);
  return detectionTable({ ...input, grid: { stepEv, count: bin + 1, vacuumBin: bin, thermalBins: 0 } });
}

// 4 k1 k2/(k1 + k2)^2 (textbook), computed outside; 0.64, 0.96 and 8/9 are exact.
Deno.test.each([
  [10, [0.11879944, 0.32923493, 0.58816665, 0.71197990, 0.82342851, 0.92820323, 0.97056275, 0.98386677]],
  [12.5, [0.1069583, 0.30043429, 0.54831057, 0.67267589, 0.78989361, 0.90798664, 0.96, 0.97738446]],
  [15, [0.09811484, 0.27836574, 0.51630426, 0.64, 0.76067708, 8 / 9, 0.94930828, 0.97056275]],
])("barrierTransmission() of a quantum step of %s eV equals the textbook values", (barrierEv, values) => {
  const outside = [0.01, 0.1, 0.5, 1, 2, 5, 10, 15];
  const step = surface(barrierEv, 6, { barrier: "quantum" });
  values.forEach((value, i) => {
    // At normal emission, and at 60 degrees inside with the same normal energy.
    const normal = barrierEv + outside[i];
    for (const cosInside of [1, -1, 0.5]) {
      const energyEv = normal / cosInside ** 2 - 6;
      assertClose(
        barrierTransmission(step, energyEv, cosInside),
        value,
        { absolute: 1e-8 },
        `${outside[i]} eV`,
      );
    }
  });
});

Deno.test("barrierTransmission() lets nothing out below the barrier and everything above a classical one", () => {
  const classical = surface(10, 6);
  assert.equal(barrierTransmission(classical, 4 + 1e-9, 1), 1);
  assert.equal(barrierTransmission(classical, 4, 1), 0);
  assert.equal(barrierTransmission({ ...classical, barrier: "quantum" }, 3.99, 1), 0);
  assert.equal(
    barrierTransmission(classical, 14, 0.7071),
    0,
    "45 degrees is the edge of the cone at E_in = 2 V0",
  );
  assert.equal(barrierTransmission(classical, 14, 0.7072), 1);
});

// Escape cone cos^2 = V0/E_in and directions averaged over it (textbook formulas), computed outside for V0 = 10 eV.
Deno.test.each([
  { insideEv: 11, coneDeg: 17.548401, classical: 0.02326871, quantum: 0.01266613, flux: 0.04965545 },
  { insideEv: 12, coneDeg: 24.094843, classical: 0.04356454, quantum: 0.02863256, flux: 0.11016779 },
  { insideEv: 15, coneDeg: 35.264390, classical: 0.09175171, quantum: 0.07245530, flux: 0.26581165 },
  { insideEv: 20, coneDeg: 45, classical: 0.14644661, quantum: 0.12663300, flux: 0.43790283 },
  { insideEv: 30, coneDeg: 54.735610, classical: 0.21132487, quantum: 0.19353102, flux: 0.61950085 },
])(
  "detectionTable() at the surface is the share of directions in the escape cone at E_in = $insideEv eV",
  (row) => {
    const bottomEv = 5.99995; // puts the tabulated energy on the center of a bin
    const energyEv = row.insideEv - bottomEv;
    const classical = surface(10, bottomEv);
    const quantum = surface(10, bottomEv, { barrier: "quantum" });
    const near = { relative: 2e-6, absolute: 5e-9 };
    assertClose(tableAt(energyEv, classical).probability[0], row.classical, near, "classical");
    assertClose(tableAt(energyEv, quantum).probability[0], row.quantum, near, "quantum");
    const edge = Math.cos(radians(row.coneDeg));
    assert.equal(barrierTransmission(quantum, energyEv, edge - 1e-8), 0);
    assert.ok(barrierTransmission(quantum, energyEv, edge + 1e-8) > 0);
    // 2 mu T dmu with q^2 = E_in mu^2 - V0, in which T is smooth: mu dmu = q dq/E_in.
    const flux = integrate(
      (q) => {
        const mu = Math.sqrt((10 + q * q) / row.insideEv);
        return (2 * q / row.insideEv) * barrierTransmission(quantum, energyEv, mu);
      },
      [1e-9, Math.sqrt(row.insideEv - 10) - 1e-9],
    );
    assertClose(flux, row.flux, { absolute: 1e-7 }, "flux");
  },
);

Deno.test("detectionTable() without a barrier is E2(z/lambda)/2", () => {
  // Escape probability of an isotropic electron: exponential integral E2, computed outside.
  const values = [[0.1, 0.361272511], [0.5, 0.163321931], [1, 0.0742477534], [2, 0.0187671309], [
    3,
    0.00532096254,
  ]];
  const table = tableAt(5, surface(0, 0, { cellsPerPath: 1000, deepestPaths: 3.5 }));
  for (const [depth, value] of values) {
    const cell = Math.round(1000 * depth);
    const there = 0.5 * (table.probability[cell - 1] + table.probability[cell]);
    assertClose(there, value, { relative: 5e-6 }, `depth ${depth}`);
  }
});

Deno.test("acceptedShare() keeps the parallel momentum through the barrier", () => {
  // sqrt(E_in) sin(theta_in) = sqrt(E_out) sin(theta_out), computed outside; 60 degrees -> 30 degrees is exact.
  for (
    const [barrierEv, outsideEv, outsideDeg, insideDeg] of [
      [10, 5, 30, 16.778655],
      [10, 5, 60, 30],
      [10, 1, 45, 12.309989],
      [12.5, 8.7, 60, 33.695698],
    ]
  ) {
    const input = surface(barrierEv, 6, { acceptanceHalfAngleRad: radians(outsideDeg) });
    const energyEv = barrierEv - 6 + outsideEv;
    assert.equal(
      acceptedShare(input, energyEv, Math.cos(radians(insideDeg - 2e-6))),
      1,
      `${insideDeg} degrees`,
    );
    assert.equal(
      acceptedShare(input, energyEv, Math.cos(radians(insideDeg + 2e-6))),
      0,
      `${insideDeg} degrees`,
    );
  }
});

Deno.test("acceptedShare() keeps the parallel momentum through the bias field", () => {
  // sin^2(theta_an) = E_out sin^2(theta_out)/(E_out + A): 5 eV at 60 degrees, accelerated by 10 eV, arrives at 30.
  const forward = surface(0, 0, { accelerationEv: 10, acceptanceHalfAngleRad: radians(30) });
  assert.equal(acceptedShare(forward, 5, Math.cos(radians(59.999))), 1);
  assert.equal(acceptedShare(forward, 5, Math.cos(radians(60.001))), 0);
  // Retarded by 2.5 eV, electrons of 5 eV beyond 45 degrees have too little normal energy to arrive.
  const retarded = surface(0, 0, { accelerationEv: -2.5 });
  assert.equal(acceptedShare(retarded, 5, Math.cos(radians(44.999))), 1);
  assert.equal(acceptedShare(retarded, 5, Math.cos(radians(45.001))), 0);
  assert.equal(acceptedShare(retarded, 2.4, 1), 0);
});

Deno.test("detectionTable() at the surface without a barrier is the solid angle of the cone", () => {
  // (1 - cos(half))/2 of all directions wherever the axis points, as long as the cone stays above the horizon.
  for (const [axis, half] of [[0, 4], [0, 60], [45, 4], [45, 20], [30, 30], [60, 25]]) {
    const angles = { emissionAngleRad: radians(axis), acceptanceHalfAngleRad: radians(half) };
    const exact = 0.5 * (1 - Math.cos(radians(half)));
    const share = tableAt(5, surface(0, 0, angles)).probability[0];
    assertClose(share, exact, { relative: 5e-6 }, `${half} degrees about ${axis}`);
    if (axis === 0) {
      // Accelerated to four times the energy, the cone takes in twice the sine of the angle at the surface.
      const wide = Math.min(1, 2 * Math.sin(radians(half)));
      const biased = tableAt(5, surface(0, 0, { ...angles, accelerationEv: 15 })).probability[0];
      assertClose(
        biased,
        0.5 * (1 - Math.sqrt(1 - wide * wide)),
        { relative: 1e-4 },
        `${half} degrees, accelerated`,
      );
    }
  }
});

Deno.test("detectionTable() is exact for a cone that holds the normal but is not centered on it", () => {
  // As above; the accepted share of azimuths has a kink there, where the quadrature is split.
  for (const [axis, half] of [[1, 4], [2, 4], [5, 30], [10, 80]]) {
    const angles = { emissionAngleRad: radians(axis), acceptanceHalfAngleRad: radians(half) };
    const exact = 0.5 * (1 - Math.cos(radians(half)));
    const share = tableAt(5, surface(0, 0, angles)).probability[0];
    assertClose(share, exact, { relative: 2e-4 }, `${half} degrees about ${axis}`);
  }
});

Deno.test("detectionTable() is empty below the vacuum level and for fields that hold everything back", () => {
  assert.equal(tableAt(3.9, surface(10, 6)).probability[0], 0);
  assert.equal(tableAt(5, surface(10, 6, { accelerationEv: -1.2 })).probability[0], 0);
  assert.ok(tableAt(5.5, surface(10, 6, { accelerationEv: -1.2 })).probability[0] > 0);
});

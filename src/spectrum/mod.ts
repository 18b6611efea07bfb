/**
 * Room `spectrum`: shapes of the two edges of a photoemission spectrum after a Gaussian response.
 *
 * @module
 */
export { broadenedFermiEdge, type FermiEdgeShape } from "./fermi_edge.ts";
export { broadenedHinge, broadenedRampStep, broadenedTopStep } from "./steps.ts";
export { doniachSunjic, lineProfile, type LineShape } from "./line_profile.ts";
export { edgeTangentShiftEv } from "./tangent_shift.ts";

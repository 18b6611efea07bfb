/**
 * Room `compare`: a measured spectrum against simulated templates: alignment, tests by part, single changes of the
 * scenario ranked by how much they explain, scenario parameters fitted to counts. Vectors and names in, results out.
 *
 * @module
 */
export { type AxisReading, placeAxis, type PlacedAxis } from "./axis.ts";
export { type Agreement, judgeMatch, type PartTest, testParts } from "./judge.ts";
export { type Match, type MatchedValue, type MatchFreedom, matchTemplate } from "./match.ts";
export { type MatchChannels, type MatchedModel, matchedModel } from "./matched_model.ts";
export { rankSuspects, type Suspect, type SuspectReport } from "./suspects.ts";
export { type Template, type TemplateFamily, templateFamily, type TemplateNode } from "./template.ts";

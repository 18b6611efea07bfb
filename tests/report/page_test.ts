import assert from "node:assert/strict";
import { createHash } from "node:crypto";
import fc from "fast-check";
import { budgetFigure, renderSvg, reportPage, type ReportPageInput } from "../../src/report/mod.ts";

/** A page with a text in every place that takes one. */
function pageOf(text: string): ReportPageInput {
  return {
    title: text,
    answer: [text, text],
    warnings: [text],
    figures: [{ title: text, svg: text, isOwn: false, description: text }],
    spectrum: { axisTitle: text, energiesEv: [1, 2, 3], counts: [4, 5, 6], expected: [4.5, 5.5, 6.5] },
    tables: [{ caption: text, head: [text, text], rows: [[text, text], [text, text]] }],
    scenario: text,
    provenance: [[text, text]],
    reproduce: { command: text, notes: [text] },
  };
}

/** Tags with the names of their attributes: what a browser makes of the page, but for texts. */
function skeleton(html: string): string[] {
  return [...html.matchAll(/<(?:[/!]|[a-zA-Z])[^>]*>/g)].map(([tag]) => tag.replaceAll(/="[^"]*"/g, '=""'));
}

const PLAIN = await reportPage(pageOf("plain"));

const HOSTILE = [
  `<script>alert(1)</script>`,
  `</script><script>alert(1)</script>`,
  `"><img src=x onerror=alert(1)>`,
  `' onload='alert(1)`,
  `</title></style></pre></main><iframe src="javascript:alert(1)">`,
  `<!-- `,
  `--> ]]> <![CDATA[`,
  `&lt;script&gt;&#x3c;`,
  `\u202eright to left\u2066`,
  `\u0000\u0008\u001b[31m\ud800`,
  `\${alert(1)}`,
  `javascript:alert(1)`,
];

async function assertInert(text: string): Promise<void> {
  const html = await reportPage(pageOf(text));
  assert.deepEqual(skeleton(html), skeleton(PLAIN), JSON.stringify(text));
  // deno-lint-ignore no-control-regex
  assert.doesNotMatch(html, /[\u0000-\u0008\u000b\u000c\u000e-\u001f\u007f]/);
}

for (const text of HOSTILE) {
  Deno.test(`reportPage() shows ${JSON.stringify(text)} and does not obey it`, () => assertInert(text));
}

Deno.test("reportPage() shows any text, and does not obey it", async () => {
  const word = fc.oneof(
    fc.constantFrom(...HOSTILE),
    fc.string({ unit: "binary" }),
    fc.constantFrom(..."<>&\"'/=!- "),
  );
  await fc.assert(
    fc.asyncProperty(fc.array(word, { maxLength: 8 }), async (words) => {
      await assertInert(words.join(""));
    }),
    { seed: 1, numRuns: 100 },
  );
});

Deno.test("the check of the two tests above rejects a page that does not escape", async () => {
  const html = await reportPage(pageOf("<b>"));
  assert.notDeepEqual(skeleton(html.replaceAll("&lt;", "<").replaceAll("&gt;", ">")), skeleton(PLAIN));
});

Deno.test("reportPage() gives back every text whole", async () => {
  const text = `a < b & "c" > 'd'\n\u05d0\u202e1`;
  const entities: Readonly<Record<string, string>> = { lt: "<", gt: ">", amp: "&", quot: '"', "#39": "'" };
  const html = await reportPage(pageOf(text));
  const shown = html.replaceAll(/&(#?\w+);/g, (_, name) => entities[name]);
  // Title twice, answers, warning, figure (title, alt), axis, table (7), scenario, provenance (2), command, note.
  assert.equal(shown.split(text).length - 1, 2 + 2 + 1 + 2 + 1 + 7 + 1 + 2 + 2);
  assert.equal(shown.split("<bdi>").length - 1, html.split("</bdi>").length - 1);
});

Deno.test("reportPage() allows exactly its own script and style, by hash, and nothing from elsewhere", () => {
  const [, policy] = /http-equiv="Content-Security-Policy" content="([^"]*)"/.exec(PLAIN) ?? [];
  const hash = (text: string): string => `'sha256-${createHash("sha256").update(text).digest("base64")}'`;
  const [, style] = /<style>([\s\S]*?)<\/style>/.exec(PLAIN) ?? [];
  const [, script] = /<script>([\s\S]*?)<\/script>/.exec(PLAIN) ?? [];
  assert.deepEqual(policy.split("; "), [
    "default-src 'none'",
    "img-src data:",
    `style-src ${hash(style)}`,
    `script-src ${hash(script)}`,
    "base-uri 'none'",
    "form-action 'none'",
  ]);
  // The policy stands before anything that it rules.
  assert.ok(PLAIN.indexOf("Content-Security-Policy") < PLAIN.indexOf("<style"));
  assert.equal(PLAIN.match(/<script/g)?.length, 2);
  // Neither attributes that load or act, nor styles in attributes.
  const attributes = skeleton(PLAIN).join("").match(/ [a-z-]+(?==)/g) ?? [];
  assert.ok(!attributes.some((name) => /^ (on|href|style|action|srcset)/.test(name)), attributes.join());
  for (const [, address] of PLAIN.matchAll(/ src="([^"]*)"/g)) {
    assert.match(address, /^data:image\/svg\+xml;base64,/);
  }
  new Function(script); // compiles
});

Deno.test("reportPage() has no script when there is no spectrum to look into", async () => {
  const html = await reportPage({ ...pageOf("plain"), spectrum: null });
  assert.doesNotMatch(html, /<script|id="explore"/);
});

Deno.test("reportPage() puts its own drawings into the page, with what they say for those who cannot see", async () => {
  const svg = await renderSvg(budgetFigure({
    title: "<i>Gold</i>",
    subtitle: [],
    terms: [{ name: "counting", contributionEv: 0.001 }],
    combinedEv: 0.001,
  }));
  const figures = [{ title: "Budget", svg, isOwn: true, description: "Counting: 1 meV" }];
  const html = await reportPage({ ...pageOf("plain"), figures });
  assert.match(html, /role="img" aria-label="Counting: 1 meV" tabindex="0"><svg /);
  assert.match(html, /&lt;i&gt;Gold/);
});

Deno.test("reportPage() stays small when a title has a million letters", async () => {
  const html = await reportPage({ ...pageOf("plain"), title: "x".repeat(1e6) });
  assert.ok(html.length < 20_000, `${html.length}`);
});

/** What is wrong, the input, and the sentence. */
const REFUSED: readonly (readonly [string, Partial<ReportPageInput>, RegExp])[] = [
  [
    "a row is too short",
    { tables: [{ caption: "Results", head: ["a", "b"], rows: [["1"]] }] },
    /^Cannot write a report as rows of Results must have 2 cells: current value is 1$/,
  ],
  [
    "there is one channel",
    { spectrum: { axisTitle: "", energiesEv: [1], counts: [1], expected: null } },
    /^Cannot write a report as the spectrum must have two channels: current value is 1$/,
  ],
  [
    "lengths differ",
    { spectrum: { axisTitle: "", energiesEv: [1, 2], counts: [1], expected: null } },
    /^Cannot write a report as lists must have length 2: current value is 1$/,
  ],
  [
    "a count is not finite",
    { spectrum: { axisTitle: "", energiesEv: [1, 2], counts: [1, NaN], expected: null } },
    /^Cannot write a report as numbers of the spectrum must be finite: current value is NaN$/,
  ],
];
for (const [what, part, message] of REFUSED) {
  Deno.test(`reportPage() refuses its input when ${what}`, async () => {
    await assert.rejects(reportPage({ ...pageOf("plain"), ...part }), { name: "RangeError", message });
  });
}

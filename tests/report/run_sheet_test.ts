import assert from "node:assert/strict";
import { type RunSheet, runSheetHtml, runSheetMarkdown } from "../../src/report/mod.ts";

const SHEET: RunSheet = {
  title: 'Gold <script>alert("1")</script> & more',
  lines: ["# not a heading", "1. not a list", "- nor this", "---"],
  sections: [{
    heading: "Set | up",
    rows: [["Bias", "-9 V"], ["<b>", "a|b"]],
    items: { numbered: true, texts: ["*first*", "second [link](x)"] },
    pictures: [{ description: "A 'window'", svg: "<svg><text>'(1)'</text></svg>", fileName: "a window.svg" }],
  }],
};

Deno.test("runSheetHtml() shows all text of a person as text", async () => {
  const html = await runSheetHtml(SHEET);
  assert.ok(!html.includes("<script"));
  assert.ok(!html.includes("<b>"));
  assert.ok(html.includes("<h1>Gold &lt;script&gt;alert(&quot;1&quot;)&lt;/script&gt; &amp; more</h1>"));
  assert.ok(html.includes('<th scope="row">&lt;b&gt;</th><td>a|b</td>'));
  assert.ok(html.includes("<ol>\n<li>*first*</li>"));
});

Deno.test("runSheetHtml() loads nothing and allows only its own style sheet and pictures inside of it", async () => {
  const html = await runSheetHtml(SHEET);
  const [, policy] = /http-equiv="Content-Security-Policy" content="([^"]*)"/.exec(html)!;
  const [, style] = /<style>(.*)<\/style>/s.exec(html)!;
  // CSP level 3: the SHA-256 of the text of the element, in base64.
  const digest = await crypto.subtle.digest("SHA-256", new TextEncoder().encode(style));
  const hash = btoa(String.fromCharCode(...new Uint8Array(digest)));
  assert.equal(
    policy,
    `default-src 'none'; style-src 'sha256-${hash}'; img-src data:; base-uri 'none'; form-action 'none'`,
  );
  assert.doesNotMatch(html, /https?:|\sstyle=|\son\w+=|url\(/);
});

Deno.test("runSheetHtml() holds its pictures, with a description", async () => {
  const [, alt, data] = /<img alt="([^"]*)" src="data:image\/svg\+xml,([^"]*)">/.exec(
    await runSheetHtml(SHEET),
  )!;
  assert.equal(alt, "A &#39;window&#39;");
  assert.equal(decodeURIComponent(data), "<svg><text>'(1)'</text></svg>");
});

Deno.test("runSheetMarkdown() escapes what Markdown would take for its own", () => {
  // CommonMark 0.31, 2.4 (backslash escapes) and 5.2 (list markers); cells of tables: GitHub Flavored Markdown 4.10.
  assert.equal(
    runSheetMarkdown(SHEET),
    [
      '# Gold \\<script\\>alert("1")\\</script\\> &amp; more',
      "",
      "\\# not a heading",
      "",
      "1\\. not a list",
      "",
      "\\- nor this",
      "",
      "\\---",
      "",
      "## Set \\| up",
      "",
      "| Setting | Value |",
      "| --- | --- |",
      "| Bias | -9 V |",
      "| \\<b\\> | a\\|b |",
      "",
      "1. \\*first\\*",
      "2. second \\[link\\](x)",
      "",
      "![A 'window'](a%20window.svg)",
      "",
    ].join("\n"),
  );
});

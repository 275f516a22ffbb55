import { expect, it } from "vitest";
import { htmlOf } from "@/lib/mail/html";

it("makes paragraphs of a message's text and links of addresses that stand alone", () => {
  const html = htmlOf(
    'One & <b>two</b>\nin "two" lines\n\nhttps://trim.example/welcome/a?b=1&c="2"\n\nNo link: see https://x.example here\n',
  );
  expect(html).toContain("<p>One &amp; &lt;b&gt;two&lt;/b&gt;<br>in &quot;two&quot; lines</p>");
  const address = "https://trim.example/welcome/a?b=1&amp;c=&quot;2&quot;";
  expect(html).toContain(`<p><a href="${address}">${address}</a></p>`);
  expect(html).toContain("<p>No link: see https://x.example here</p>");
});

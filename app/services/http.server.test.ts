import { describe, expect, it } from "vitest";
import { z } from "zod";
import { attachment, readJson } from "./http.server.ts";

function post(body: string, headers: Record<string, string> = {}): Request {
  return new Request("http://ogee.example/x", {
    method: "POST",
    body,
    headers: { "Content-Length": String(body.length), ...headers },
  });
}

describe("a request's JSON", () => {
  const schema = z.strictObject({ day: z.iso.date("The day is not a date.") });

  it("is read where it has the shape", async () => {
    expect(await readJson(post('{"day":"2026-12-01"}'), schema)).toEqual({ day: "2026-12-01" });
  });

  it.each([
    ['{"day":"tomorrow"}', {}, 400, "day: The day is not a date."],
    ["{", {}, 400, "This request is not readable: load the page again."],
    [
      "{}",
      { "Content-Length": "9999999" },
      413,
      "This request is too large, or does not say how large it is.",
    ],
  ])("is refused with a sentence: %s", async (body, headers, status, sentence) => {
    const thrown = await readJson(post(body, headers), schema).catch((error: unknown) => error);
    expect(thrown).toBeInstanceOf(Response);
    expect((thrown as Response).status).toBe(status);
    expect(await (thrown as Response).text()).toBe(sentence);
  });
});

describe("the name of a download", () => {
  // RFC 6266 with the encoding of RFC 8187.
  it("keeps plain names, and encodes others beside a plain one", () => {
    expect(attachment("W07_off.csv")).toBe(
      "attachment; filename=\"W07_off.csv\"; filename*=UTF-8''W07_off.csv",
    );
    expect(attachment('Grün "1"*.csv')).toBe(
      "attachment; filename=\"Gr_n _1_*.csv\"; filename*=UTF-8''Gr%C3%BCn%20%221%22%2A.csv",
    );
  });
});

import { describe, expect, it } from "vitest";
import { wordsOfError } from "./error-screen.tsx";

/** As the router hands a thrown response to an error boundary. */
function response(status: number, data: unknown) {
  return { status, statusText: "", internal: false, data };
}

describe("what went wrong, in words", () => {
  it("passes on the sentence that says who may", () => {
    const { text } = wordsOfError(response(403, "This is for the role reviewer."));
    expect(text).toBe("This is for the role reviewer.");
  });

  it("says the same of what does not exist and of what belongs to another lab", () => {
    expect(wordsOfError(response(404, ""))).toEqual(
      wordsOfError(response(404, 'Error: No route matches URL "/x"')),
    );
  });

  it("shows nothing of an error's inside", () => {
    const { text } = wordsOfError(new Error("SQLITE_BUSY at Object.<anonymous>"));
    expect(text).not.toContain("SQLITE");
    expect(wordsOfError(response(500, "stack")).text).not.toContain("stack");
  });
});

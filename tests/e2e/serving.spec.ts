/** What every answer of the running application carries, and what it refuses before a page is asked. */
import { request as httpRequest } from "node:http";
import { type APIResponse, expect, test } from "@playwright/test";
import { demoAccount, demoAddress, signInToDemo } from "../support/demo-page.ts";

function policyOf(answer: APIResponse): Map<string, string> {
  const policy = answer.headers()["content-security-policy"] ?? "";
  return new Map(
    policy.split("; ").map((directive) => {
      const [name = "", ...values] = directive.split(" ");
      return [name, values.join(" ")];
    }),
  );
}

test("every answer carries the policy, with a nonce of its own, and says nothing of what serves it", async ({
  request,
}) => {
  const nonces = new Set<string>();
  for (const path of ["/sign-in", "/health", "/favicon.svg", "/recordings/none/raw", "/no/such"]) {
    const answer = await request.get(demoAddress() + path, { maxRedirects: 0 });
    const headers = answer.headers();
    const policy = policyOf(answer);
    expect(policy.get("default-src"), path).toBe("'self'");
    expect(policy.get("style-src"), path).toBe("'self'");
    expect(policy.get("frame-ancestors"), path).toBe("'none'");
    expect(policy.get("base-uri"), path).toBe("'none'");
    expect(policy.get("object-src"), path).toBe("'none'");
    expect(policy.get("form-action"), path).toBe("'self'");
    const [, nonce = ""] =
      /^'self' 'nonce-([\w+/=]{24})'$/.exec(policy.get("script-src") ?? "") ?? [];
    expect(nonce, path).not.toBe("");
    nonces.add(nonce);
    expect(headers["x-content-type-options"], path).toBe("nosniff");
    expect(headers["referrer-policy"], path).toBe("same-origin");
    expect(headers["cross-origin-opener-policy"], path).toBe("same-origin");
    expect(headers["permissions-policy"], path).toContain("camera=()");
    expect(headers["x-powered-by"], path).toBeUndefined();
    // By http a browser that obeyed it could not come back.
    expect(headers["strict-transport-security"], path).toBeUndefined();
  }
  expect(nonces.size).toBe(5);
});

test("pages are kept from caches; built files stay in them for good", async ({ request }) => {
  const page = await request.get(`${demoAddress()}/sign-in`);
  expect(page.headers()["cache-control"]).toBe("private, no-store");
  const [, script] = /href="(\/assets\/[^"]+\.js)"/.exec(await page.text()) ?? [];
  const built = await request.get(demoAddress() + script);
  expect(built.headers()["cache-control"]).toBe("public, max-age=31536000, immutable");
  expect(built.headers()["content-encoding"]).toBeDefined();
  // A worker's script brings its own policy, and hashing in it runs as WebAssembly.
  expect(policyOf(built).get("script-src")).toBe("'self' 'wasm-unsafe-eval'");
});

test("pages go out compressed to who takes it, and as they are to who does not", async ({
  request,
}) => {
  const { email, password } = demoAccount("analyst");
  const signedIn = await request.post(`${demoAddress()}/sign-in`, {
    headers: { Origin: demoAddress() },
    form: { email, password },
    maxRedirects: 0,
  });
  expect(signedIn.status()).toBe(302);
  for (const path of ["/studies", "/studies.data"]) {
    const zipped = await request.get(demoAddress() + path);
    expect(zipped.headers()["content-encoding"], path).toBe("gzip");
    const plain = await request.get(demoAddress() + path, {
      headers: { "Accept-Encoding": "identity" },
    });
    expect(plain.headers()["content-encoding"], path).toBeUndefined();
    for (const answer of [zipped, plain]) {
      expect(answer.headers().vary, path).toContain("Accept-Encoding");
      expect(await answer.text(), path).toMatch(/Wrist/i);
    }
  }
});

test("a body that is too large, or does not say how large it is, is not read", async () => {
  const send = (length: Record<string, string>, type = "application/x-www-form-urlencoded") =>
    new Promise<number | undefined>((resolve, reject) => {
      const headers = { "Content-Type": type, ...length };
      const asked = httpRequest(`${demoAddress()}/preferences`, { method: "POST", headers });
      asked.once("error", reject).once("response", (answer) => {
        resolve(answer.statusCode);
        asked.destroy();
      });
      // The head alone: the answer comes before the body.
      asked.flushHeaders();
    });
  expect(await send({ "Content-Length": String(1024 * 1024 + 1) })).toBe(413);
  expect(await send({ "Content-Length": String(16 * 1024 * 1024 + 1) }, "application/json")).toBe(
    413,
  );
  expect(await send({ "Transfer-Encoding": "chunked" })).toBe(411);
});

test("the server is alive and ready", async ({ request }) => {
  expect(await (await request.get(`${demoAddress()}/health`)).json()).toEqual({ status: "alive" });
  const ready = await request.get(`${demoAddress()}/ready`);
  expect(ready.status()).toBe(200);
  expect(await ready.json()).toEqual({ status: "ready", database: true, storage: true });
});

test("a change that comes from a page of another site is refused before anything is looked at", async ({
  request,
}) => {
  const elsewhere: Record<string, string>[] = [
    { "Sec-Fetch-Site": "cross-site" },
    // Another port of this machine.
    { "Sec-Fetch-Site": "same-site" },
    { Origin: "https://other.example" },
    { Origin: "null" },
  ];
  for (const path of ["/sign-in", "/sign-out", "/preferences", "/studies/s/uploads"]) {
    for (const headers of elsewhere) {
      const answer = await request.post(demoAddress() + path, { headers, form: { theme: "day" } });
      expect(answer.status(), `${path} ${JSON.stringify(headers)}`).toBe(403);
      expect(await answer.text()).toMatch(/^This came from a page of another site\./);
    }
  }
  const ours = await request.post(`${demoAddress()}/preferences`, {
    headers: { Origin: demoAddress() },
    form: { theme: "day" },
  });
  expect(ours.status()).toBe(200);
});

test("a script that found its way into a page does not run, and pages need none such", async ({
  page,
}) => {
  const complaints: string[] = [];
  page.on("console", (message) => {
    if (message.type() === "error" || message.type() === "warning") complaints.push(message.text());
  });
  page.on("pageerror", (error) => complaints.push(error.message));
  await page.goto(`${demoAddress()}/sign-in`);
  await page.waitForLoadState("networkidle");
  expect(complaints).toEqual([]);
  await page.evaluate(() => {
    const script = document.createElement("script");
    script.textContent = "document.title = 'it ran'";
    document.body.append(script);
  });
  await expect(page).toHaveTitle("Sign in · Ogee");
  await expect.poll(() => complaints.join(" ")).toMatch(/Content Security Policy/);
});

test("a person signs in without scripts, and is led back to where they wanted to go", async ({
  browser,
}) => {
  const context = await browser.newContext({ javaScriptEnabled: false });
  const page = await context.newPage();
  await page.goto(`${demoAddress()}/studies`);
  await expect(page).toHaveURL(`${demoAddress()}/sign-in?to=%2Fstudies`);
  const { email, password } = demoAccount("analyst");
  await page.getByLabel("E-mail address").fill(email);
  await page.getByLabel("Password").fill("not the password");
  await page.getByRole("button", { name: "Sign in" }).click();
  await expect(page.getByRole("alert")).toHaveText(/do not belong together/);
  await expect(page.getByLabel("E-mail address")).toHaveValue(email);
  await expect(page.getByLabel("Password")).toHaveValue("");
  await page.getByLabel("Password").fill(password);
  await page.getByRole("button", { name: "Sign in" }).click();
  await expect(page).toHaveURL(`${demoAddress()}/studies`);
  const [cookie] = await context.cookies();
  expect(cookie).toMatchObject({ httpOnly: true, sameSite: "Lax", path: "/" });
  await context.close();
});

test("who goes back after signing out sees nothing of the lab", async ({ page }) => {
  await signInToDemo(page, "manager");
  await page.goto(`${demoAddress()}/studies`);
  await expect(page.getByRole("heading", { level: 1 })).toBeVisible();
  await page.getByRole("button", { name: "Sign out" }).click();
  await expect(page.getByRole("heading", { name: "Sign in" })).toBeVisible();
  await page.goBack();
  await expect(page.getByRole("heading", { name: "Sign in" })).toBeVisible();
});

test("the sign-in page says that the demo has no second factor, and what Ogee is not for", async ({
  page,
}) => {
  await page.goto(`${demoAddress()}/sign-in`);
  await expect(page.getByText(/sign in without a second factor/)).toBeVisible();
  await expect(page.getByText(/not a medical device and not for diagnosis/)).toBeVisible();
});

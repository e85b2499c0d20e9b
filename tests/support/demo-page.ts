import { expect, type Page } from "@playwright/test";
import type { Role } from "#app/domain/role.ts";

interface Account {
  email: string;
  password: string;
}

/** Where the demo of the browser tests serves. */
export function demoAddress(): string {
  const address = process.env.OGEE_TEST_ADDRESS;
  if (!address) throw new Error("No demo was started for this test.");
  return address;
}

export function demoAccount(role: Role): Account {
  const accounts: Partial<Record<Role, Account>> = JSON.parse(
    process.env.OGEE_TEST_SIGN_INS ?? "{}",
  );
  const account = accounts[role];
  if (!account) throw new Error(`The demo names no ${role}.`);
  return account;
}

/** Signs the demo's person of this role in, as a person does; ends on their own page. */
export async function signInToDemo(page: Page, role: Role): Promise<void> {
  const { email, password } = demoAccount(role);
  await page.goto(`${demoAddress()}/sign-in`);
  await page.getByLabel("E-mail address").fill(email);
  await page.getByLabel("Password").fill(password);
  await page.getByRole("button", { name: "Sign in" }).click();
  await expect(page).toHaveURL(`${demoAddress()}/`);
}

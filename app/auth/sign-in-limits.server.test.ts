import { describe, expect, it } from "vitest";
import { networkOf, openSignInLimits } from "./sign-in-limits.server.ts";

describe("whose an address is", () => {
  it.each([
    ["192.0.2.7", "192.0.2.7"],
    ["::ffff:192.0.2.7", "192.0.2.7"],
    ["2001:db8:1:2:3:4:5:6", "2001:db8:1:2::/64"],
    ["2001:0DB8:0001:0002::6", "2001:db8:1:2::/64"],
    ["2001:db8::6", "2001:db8:0:0::/64"],
    ["fe80::1%eth0", "fe80:0:0:0::/64"],
    ["::1", "0:0:0:0::/64"],
    ["64:ff9b::192.0.2.7", "64:ff9b:0:0::/64"],
    ["unknown", "unknown"],
  ])("%s counts as %s", (address, network) => {
    expect(networkOf(address)).toBe(network);
  });
});

describe("tries from one network address", () => {
  it("are stopped after sixty, whichever of its addresses they come from and whomever they name", async () => {
    const limits = openSignInLimits();
    const waits: (number | null)[] = [];
    for (let n = 0; n < 61; n++) {
      waits.push(await limits.count(`2001:db8:1:2::${n}`, `person-${n}@lab.example`));
    }
    expect(waits.slice(0, 60).every((wait) => wait === null)).toBe(true);
    expect(waits[60]).toBe(900);
    expect(await limits.count("2001:db8:1:3::1", "person-1@lab.example")).toBeNull();
  });

  it("that are stopped use up nobody's account", async () => {
    const limits = openSignInLimits();
    for (let n = 0; n < 60; n++) await limits.count("192.0.2.1", `person-${n}@lab.example`);
    for (let n = 0; n < 40; n++) {
      expect(await limits.count("192.0.2.1", "ada@lab.example")).not.toBeNull();
    }
    expect(await limits.count("192.0.2.2", "ada@lab.example")).toBeNull();
  });
});

import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import type { Desk } from "#app/auth/desk.server.ts";
import { openStore, type Store } from "#app/db/client.server.ts";
import { labs, membershipRoles, memberships, people } from "#app/db/schema.ts";
import { type Actor, ROLES, type Role } from "#app/domain/role.ts";
import { type FixedClock, fixedClock } from "./clock.ts";
import { type MemoryStorage, memoryStorage } from "./storage.ts";

export interface TestPerson {
  id: string;
  name: string;
  email: string;
}

export interface TestLab {
  desk: Desk & { clock: FixedClock; storage: MemoryStorage };
  store: Store;
  /** `file:` address of the temporary database. */
  url: string;
  lab: { id: string; name: string };
  otherLab: { id: string; name: string };
  /** One person for each role of `lab`. */
  people: Record<Role, TestPerson>;
  /** Holds all four roles in `otherLab`, and nothing in `lab`. */
  outsider: TestPerson;
  /** Who acts in `lab` with this one role. */
  actor(role: Role): Actor;
  outsideActor: Actor;
  /** Closes the store and removes its folder. */
  close(): void;
}

/** A temporary database with two labs and their people, a fixed clock and storage in memory. */
export async function openTestLab(): Promise<TestLab> {
  const folder = mkdtempSync(join(tmpdir(), "ogee-test-"));
  const url = `file:${join(folder, "ogee.db")}`;
  const store = await openStore(url);
  const clock = fixedClock();
  const createdAt = clock.now();
  const lab = { id: "lab-one", name: "Movement room" };
  const otherLab = { id: "lab-two", name: "Other room" };
  const named = (word: string): TestPerson => ({
    id: `person-${word}`,
    name: `The ${word}`,
    email: `${word}@lab.example`,
  });
  const byRole: Record<Role, TestPerson> = {
    biomechanist: named("biomechanist"),
    analyst: named("analyst"),
    reviewer: named("reviewer"),
    manager: named("manager"),
  };
  const outsider = named("outsider");

  await store.write(async (tx) => {
    await tx.insert(labs).values([lab, otherLab].map((row) => ({ ...row, createdAt })));
    const join = async (person: TestPerson, labId: string, roles: readonly Role[]) => {
      const membershipId = `member-${person.id}`;
      // No password opens this hash; tests of signing in set one.
      await tx.insert(people).values({ ...person, passwordHash: "none", createdAt });
      await tx
        .insert(memberships)
        .values({ id: membershipId, labId, personId: person.id, createdAt });
      await tx.insert(membershipRoles).values(roles.map((role) => ({ membershipId, role })));
    };
    for (const role of ROLES) await join(byRole[role], lab.id, [role]);
    await join(outsider, otherLab.id, ROLES);
  });

  return {
    desk: { store, clock, storage: memoryStorage() },
    store,
    url,
    lab,
    otherLab,
    people: byRole,
    outsider,
    actor: (role) => ({ personId: byRole[role].id, labId: lab.id, roles: [role] }),
    outsideActor: { personId: outsider.id, labId: otherLab.id, roles: ROLES },
    close: () => {
      store.close();
      rmSync(folder, { recursive: true, force: true });
    },
  };
}

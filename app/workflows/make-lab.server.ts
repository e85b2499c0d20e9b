import { recordEvent } from "#app/db/events.server.ts";
import {
  findLabByName,
  findPersonByEmail,
  insertLab,
  insertMembership,
  insertPerson,
} from "#app/db/people.server.ts";
import type { Role } from "#app/domain/role.ts";
import type { Desk } from "./desk.server.ts";

export interface NewLab {
  labName: string;
  person: {
    name: string;
    /** Trimmed and in lower case. */
    email: string;
    /** Not used where the address has an account already: that keeps its own password. */
    passwordHash: string;
  };
  roles: readonly Role[];
}

export type MadeLab =
  | { status: "made"; labId: string; personId: string; hadAccount: boolean }
  | { status: "name_taken" };

/** Makes a lab and its first person. Nobody is in the lab yet, so nobody acts: whoever runs the installation does. */
export function makeLab(desk: Pick<Desk, "store" | "clock">, input: NewLab): Promise<MadeLab> {
  const { store, clock } = desk;
  return store.write(async (tx): Promise<MadeLab> => {
    if ((await findLabByName(tx, input.labName)) !== null) return { status: "name_taken" };
    const createdAt = clock.now();
    const labId = clock.newId();
    await insertLab(tx, { id: labId, name: input.labName, createdAt });
    const event = { at: createdAt, labId, personId: null };
    await recordEvent(tx, {
      ...event,
      kind: "lab.made",
      objectType: "lab",
      objectId: labId,
      detail: { name: input.labName },
    });

    const known = await findPersonByEmail(tx, input.person.email);
    const personId = known?.id ?? clock.newId();
    if (known === null) {
      await insertPerson(tx, { id: personId, ...input.person, createdAt });
      await recordEvent(tx, {
        ...event,
        kind: "person.made",
        objectType: "person",
        objectId: personId,
      });
    }
    const membershipId = clock.newId();
    await insertMembership(tx, {
      id: membershipId,
      labId,
      personId,
      roles: input.roles,
      createdAt,
    });
    await recordEvent(tx, {
      ...event,
      kind: "member.added",
      objectType: "person",
      objectId: personId,
      detail: { roles: [...input.roles] },
    });
    return { status: "made", labId, personId, hadAccount: known !== null };
  });
}

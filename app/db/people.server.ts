import { and, asc, eq, isNull } from "drizzle-orm";
import type { Role } from "#app/domain/role.ts";
import type { Reader, Transaction } from "./client.server.ts";
import { labs, membershipRoles, memberships, people } from "./schema.ts";

export type PersonRow = typeof people.$inferSelect;

/** A lab that a person works in now, with their roles there. */
export interface Membership {
  lab: { id: string; name: string };
  roles: Role[];
}

/** @param email  trimmed and in lower case */
export async function findPersonByEmail(db: Reader, email: string): Promise<PersonRow | null> {
  const [row] = await db.select().from(people).where(eq(people.email, email)).limit(1);
  return row ?? null;
}

export async function findPerson(db: Reader, id: string): Promise<PersonRow | null> {
  const [row] = await db.select().from(people).where(eq(people.id, id)).limit(1);
  return row ?? null;
}

/** The labs that the person is in, by name; ended memberships and those without a role left out. */
export async function listMemberships(db: Reader, personId: string): Promise<Membership[]> {
  const rows = await db
    .select({ labId: labs.id, labName: labs.name, role: membershipRoles.role })
    .from(memberships)
    .innerJoin(labs, eq(labs.id, memberships.labId))
    .innerJoin(membershipRoles, eq(membershipRoles.membershipId, memberships.id))
    .where(and(eq(memberships.personId, personId), isNull(memberships.endedAt)))
    .orderBy(asc(labs.name), asc(labs.id), asc(membershipRoles.role));
  const found = new Map<string, Membership>();
  for (const { labId, labName, role } of rows) {
    const membership = found.get(labId) ?? { lab: { id: labId, name: labName }, roles: [] };
    membership.roles.push(role);
    found.set(labId, membership);
  }
  return [...found.values()];
}

export async function findMembership(
  db: Reader,
  personId: string,
  labId: string,
): Promise<Membership | null> {
  const rows = await db
    .select({ labName: labs.name, role: membershipRoles.role })
    .from(memberships)
    .innerJoin(labs, eq(labs.id, memberships.labId))
    .innerJoin(membershipRoles, eq(membershipRoles.membershipId, memberships.id))
    .where(
      and(
        eq(memberships.personId, personId),
        eq(memberships.labId, labId),
        isNull(memberships.endedAt),
      ),
    )
    .orderBy(asc(membershipRoles.role));
  const [first] = rows;
  if (first === undefined) return null;
  return { lab: { id: labId, name: first.labName }, roles: rows.map(({ role }) => role) };
}

export async function findLabByName(
  db: Reader,
  name: string,
): Promise<{ id: string; name: string } | null> {
  const [row] = await db
    .select({ id: labs.id, name: labs.name })
    .from(labs)
    .where(eq(labs.name, name))
    .limit(1);
  return row ?? null;
}

export async function insertLab(tx: Transaction, row: typeof labs.$inferInsert): Promise<void> {
  await tx.insert(labs).values(row);
}

export async function insertPerson(
  tx: Transaction,
  row: typeof people.$inferInsert,
): Promise<void> {
  await tx.insert(people).values(row);
}

/** Puts the person into the lab with these roles (one at least). */
export async function insertMembership(
  tx: Transaction,
  row: { id: string; labId: string; personId: string; roles: readonly Role[]; createdAt: number },
): Promise<void> {
  const { roles, ...membership } = row;
  await tx.insert(memberships).values(membership);
  await tx
    .insert(membershipRoles)
    .values([...new Set(roles)].map((role) => ({ membershipId: row.id, role })));
}

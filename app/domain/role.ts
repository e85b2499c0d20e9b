/** The four roles of a lab; one person can hold several, and be in several labs. */
export const ROLES = ["biomechanist", "analyst", "reviewer", "manager"] as const;
export type Role = (typeof ROLES)[number];

/** What a person may do; one word for each row of the table in DEVELOPERS.md. */
export const ABILITIES = {
  read: ["biomechanist", "analyst", "reviewer", "manager"],
  take_in: ["biomechanist"],
  fit: ["biomechanist"],
  submit: ["biomechanist"],
  set_up_study: ["biomechanist", "manager"],
  compare: ["analyst"],
  download: ["biomechanist", "analyst", "reviewer", "manager"],
  review: ["reviewer"],
  manage_lab: ["manager"],
} as const satisfies Record<string, readonly Role[]>;
export type Ability = keyof typeof ABILITIES;

/** Who acts, in which lab; every workflow takes one. */
export interface Actor {
  personId: string;
  labId: string;
  roles: readonly Role[];
}

export function may(actor: Pick<Actor, "roles">, ability: Ability): boolean {
  const allowed: readonly Role[] = ABILITIES[ability];
  return actor.roles.some((role) => allowed.includes(role));
}

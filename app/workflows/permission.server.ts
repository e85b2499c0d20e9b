import { forbidden } from "#app/domain/refusal.ts";
import { ABILITIES, type Ability, type Actor, may } from "#app/domain/role.ts";

/**
 * Every workflow asks for itself, whoever calls it: a page, a script or background work.
 *
 * @throws forbidden
 */
export function requireAbility(actor: Actor, ability: Ability): void {
  if (!may(actor, ability)) {
    throw forbidden(`This is for the role ${ABILITIES[ability].join(" or ")} of the lab.`);
  }
}

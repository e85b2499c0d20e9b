import { createHash } from "node:crypto";
import { recordEvent } from "#app/db/events.server.ts";
import { findRig, updateRigImpedance } from "#app/db/rigs.server.ts";
import { canonicalJson } from "#app/domain/canonical-json.ts";
import { notFound } from "#app/domain/refusal.ts";
import type { Actor } from "#app/domain/role.ts";
import { EngineError } from "#app/engine/errors.ts";
import { analyze, readRecording } from "#app/engine/pipeline.ts";
import type { Protocol, ResultRig, Signals } from "#app/engine/types.ts";
import type { Desk } from "./desk.server.ts";
import { requireAbility } from "./permission.server.ts";

/**
 * Fits the rig's own K, B, I from a recording of the rig without a limb and keeps them with the
 * rig: the protocols compiled from then on take them off. The raw bytes are kept.
 */
export async function measureRig(
  desk: Desk,
  actor: Actor,
  input: { rigId: string; fileName: string; bytes: Uint8Array; protocol: Protocol },
): Promise<
  | { status: "measured"; impedance: Record<string, ResultRig> }
  | { status: "refused"; sentence: string }
> {
  requireAbility(actor, "manage_lab");
  if (!(await findRig(desk.store.db, actor.labId, input.rigId))) throw notFound();
  const sha256 = createHash("sha256").update(input.bytes).digest("hex");
  let signals: Signals;
  try {
    signals = readRecording(input.bytes, input.protocol);
  } catch (error) {
    if (!(error instanceof EngineError)) throw error;
    const at = error.line === null ? "" : `, line ${error.line}`;
    return { status: "refused", sentence: `${input.fileName}${at}: ${error.message}` };
  }
  const empty = { file: input.fileName, sha256, signals };
  const { rig } = analyze({
    protocol: input.protocol,
    protocolSha256: "",
    recordings: [],
    rig: [empty],
    windows: null,
  });
  for (const axis of input.protocol.axes) {
    if (!rig[axis.name]) {
      return {
        status: "refused",
        sentence: `${input.fileName} holds no usable movement about ${axis.name}: record the empty rig with the ramps of the study.`,
      };
    }
  }
  // Beside the recordings' addresses: a refused recording of the same bytes is cleared away.
  const storageKey = `raw/${actor.labId}/rigs/${sha256}`;
  await desk.storage.put(storageKey, input.bytes);
  const at = desk.clock.now();
  await desk.store.write(async (tx) => {
    const values = Object.fromEntries(
      Object.entries(rig).map(([axis, { K, B, I }]) => [axis, { K, B, I }]),
    );
    await updateRigImpedance(tx, input.rigId, canonicalJson(values));
    await recordEvent(tx, {
      at,
      labId: actor.labId,
      personId: actor.personId,
      kind: "rig.measured",
      objectType: "rig",
      objectId: input.rigId,
      detail: { fileName: input.fileName, sha256, storageKey, impedance: values },
    });
  });
  return { status: "measured", impedance: rig };
}

import { CELL_STATES, type CellState, recordingMapSchema } from "./recording.ts";

/** A cell of a study: one participant, one condition, one axis; and how far its recordings have come. */

export interface CellRecording {
  recordingId: string;
  participantId: string;
  conditionId: string;
  postureId: string;
  /** Axes that the recording moves, by name. */
  axes: readonly string[];
  state: CellState;
}

export interface Cell {
  state: CellState;
  /** Recordings that stand behind it. */
  recordingIds: string[];
}

/** A recording without a saved fit is only recorded. */
export function recordingState(fitState: Exclude<CellState, "nothing"> | null): CellState {
  return fitState ?? "recorded";
}

/** Which axes a stored channel map names; none where it cannot be read. */
export function axesOfChannelMap(channelMap: string): string[] {
  try {
    const map = recordingMapSchema.safeParse(JSON.parse(channelMap));
    return map.success ? map.data.axes.map((axis) => axis.name) : [];
  } catch {
    return [];
  }
}

/** The least advanced of several; "nothing" where there is none. */
export function leastAdvanced(states: readonly CellState[]): CellState {
  return states.length === 0 ? "nothing" : leastAdvancedOf(states);
}

/** The same where there is one at least. @throws TypeError for an empty list */
export function leastAdvancedOf<State extends CellState>(states: readonly State[]): State {
  const order = (state: State) => CELL_STATES.indexOf(state);
  return states.reduce((least, state) => (order(state) < order(least) ? state : least));
}

/** Every cell of a study that has a recording; look one up by `cellKey`. */
export function cellsOf(recordings: readonly CellRecording[]): Map<string, Cell> {
  const groups = new Map<string, CellRecording[]>();
  for (const recording of recordings) {
    for (const axis of recording.axes) {
      const key = cellKey(recording.participantId, recording.conditionId, axis);
      groups.set(key, [...(groups.get(key) ?? []), recording]);
    }
  }
  return new Map(
    [...groups].map(([key, group]) => [
      key,
      {
        state: leastAdvanced(group.map((recording) => recording.state)),
        recordingIds: group.map((recording) => recording.recordingId),
      },
    ]),
  );
}

export function cellKey(participantId: string, conditionId: string, axis: string): string {
  return JSON.stringify([participantId, conditionId, axis]);
}

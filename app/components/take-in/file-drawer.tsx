import { type ReactNode, useEffect, useRef } from "react";
import { Button } from "#app/components/button.tsx";
import { FlagNote } from "#app/components/flag.tsx";
import { countOf, formatBytes, formatDigits, THIN_SPACE } from "#app/domain/quantity.ts";
import { FLAGS, type FlagCode } from "#app/engine/errors.ts";
import type { FileReading, Flag } from "#app/engine/types.ts";
import {
  type BatchFile,
  changeMap,
  confirmAxis,
  giveOwnMap,
  mapOf,
  mapProblemsOf,
  mayChange,
  nameWarning,
  readingOf,
  setTable,
  shareMapAgain,
  sharersOf,
  sideOf,
  standingOf,
  type TakeInStudy,
} from "./batch.ts";
import { LayoutFields, layoutInWords } from "./layout-fields.tsx";
import { rolesOfColumns, turnMovement, turnTorque } from "./map-draft.ts";
import { MapFields } from "./map-fields.tsx";
import { MovementNote } from "./movement-note.tsx";
import { PreviewTable } from "./preview-table.tsx";
import { standingInWords } from "./standing-words.ts";
import type { TakeIn } from "./use-take-in.ts";

/** The chosen file: what it holds, which column is what, and which way the limb went. */
export function FileDrawer({
  file,
  study,
  takeIn,
  actions,
}: {
  file: BatchFile;
  study: TakeInStudy;
  takeIn: TakeIn;
  actions: ReactNode;
}) {
  const { batch, change } = takeIn;
  const head = file.head?.status === "read" ? file.head : null;
  const map = mapOf(batch, study, file);
  const wanted = readingOf(batch, study, file);
  const reading = wanted && file.reading?.key === wanted.key ? file.reading.result : null;
  const standing = standingOf(batch, study, file);
  const warning = nameWarning(study, file.name);
  const isOpen = mayChange(file) && standing.kind !== "held" && standing.kind !== "same";
  return (
    <>
      <ShownHeading key={file.id} name={file.name} />
      <p className="text-sm text-ink-2">{factsInWords(file, reading)}</p>
      <p className="text-sm">{standingInWords(standing)}</p>
      {warning ? <FlagNote text={warning} /> : null}
      {head ? <Flags flags={head.preview.flags} /> : null}
      {reading?.status === "read" ? <Flags flags={reading.facts.flags} /> : null}

      {head ? (
        <section aria-labelledby="first-rows" className="mt-3">
          <h3 id="first-rows">First rows</h3>
          <p className="mb-1 text-sm text-ink-2">{layoutInWords(head.preview.dialect)}</p>
          <PreviewTable
            fileName={file.name}
            preview={head.preview}
            roles={map ? rolesOfColumns(map, study.axes) : new Map()}
          />
          {head.preview.preamble.length > 0 ? (
            <p className="mt-1 text-sm text-ink-2">
              Above the names:{" "}
              <span className="font-mono">{head.preview.preamble.slice(0, 3).join(" / ")}</span>
              {head.preview.preamble.length > 3 ? " …" : ""}
            </p>
          ) : null}
        </section>
      ) : null}
      {isOpen && file.head ? (
        <details className="mt-1" key={`layout of ${file.id}`} open={head === null || undefined}>
          <summary className="min-h-6 text-sm text-ink-2">layout of the text</summary>
          <LayoutFields
            onChange={(table) => change((now) => setTable(now, [file.id], table))}
            table={file.table}
          />
        </details>
      ) : null}

      {head && map && isOpen ? (
        <section aria-labelledby="channels" className="mt-3">
          <h3 id="channels">Channels</h3>
          <Sharing file={file} study={study} takeIn={takeIn} />
          <MapFields
            axes={study.axes}
            key={file.id}
            map={map}
            movementOf={(axis) => {
              const studyAxis = study.axes.find(({ name }) => name === axis.name);
              const side = sideOf(study, file);
              if (!studyAxis) return null;
              return (
                <MovementNote
                  axis={studyAxis}
                  draft={axis}
                  isMoot={wanted === null || reading?.status === "refused"}
                  movement={
                    reading?.status === "read"
                      ? (reading.movements.find((one) => one.axis === axis.name) ?? null)
                      : null
                  }
                  onConfirm={() => change((now) => confirmAxis(now, study, file.id, axis.name))}
                  onTurn={() =>
                    side &&
                    change((now) =>
                      changeMap(now, study, file.id, (one) => turnMovement(one, axis.name, side)),
                    )
                  }
                  onTurnTorque={() =>
                    side &&
                    change((now) =>
                      changeMap(now, study, file.id, (one) => turnTorque(one, axis.name, side)),
                    )
                  }
                  side={side}
                />
              );
            }}
            onChange={(next) => change((now) => changeMap(now, study, file.id, next))}
            surface={{
              preview: head.preview,
              problems: mapProblemsOf(batch, study, file),
              side: sideOf(study, file),
            }}
          />
        </section>
      ) : null}
      <div className="mt-4 flex flex-wrap gap-2">{actions}</div>
    </>
  );
}

/** On a narrow screen the drawer stands below the list: choosing a file brings it into view. */
function ShownHeading({ name }: { name: string }) {
  const heading = useRef<HTMLHeadingElement>(null);
  const isFirst = useRef(true);
  useEffect(() => {
    if (!isFirst.current) return;
    isFirst.current = false;
    if (window.matchMedia("(min-width: 64rem)").matches) return;
    const isAsked = document.activeElement?.closest("[aria-label='Files']");
    if (!isAsked) return;
    heading.current?.scrollIntoView({ block: "start" });
    heading.current?.focus({ preventScroll: true });
  }, []);
  return (
    <h2 className="font-mono break-all" ref={heading} tabIndex={-1}>
      {name}
    </h2>
  );
}

/** Size, samples, rate and length: "5.1 MB, 54 400 samples at 2000 Hz, 27.2 s". */
function factsInWords(file: BatchFile, reading: FileReading | null): string {
  const parts = [formatBytes(file.sizeBytes)];
  if (reading?.status === "read") {
    const { samples, rateHz, durationS, gaps, missing } = reading.facts;
    parts.push(
      `${grouped(samples)} samples at ${formatDigits(rateHz, 4)}${THIN_SPACE}Hz`,
      `${formatDigits(durationS, 3)}${THIN_SPACE}s`,
    );
    if (gaps > 0) parts.push(countOf(gaps, "gap"));
    if (missing > 0) parts.push(countOf(missing, "missing cell"));
  }
  return parts.join(", ");
}

function grouped(count: number): string {
  return String(count).replace(/\B(?=(\d{3})+$)/g, THIN_SPACE);
}

function Flags({ flags }: { flags: readonly Flag[] }) {
  return flags.map(({ code, text }) => (
    <FlagNote key={code + text} text={text} todo={isFlag(code) ? FLAGS[code].todo : undefined} />
  ));
}

function isFlag(code: string): code is FlagCode {
  return Object.hasOwn(FLAGS, code);
}

/** Whose map this is, and how to part from it or return to it. */
function Sharing({ file, study, takeIn }: { file: BatchFile; study: TakeInStudy; takeIn: TakeIn }) {
  const { batch, change } = takeIn;
  const [first, ...others] = sharersOf(batch, study, file);
  const map = mapOf(batch, study, file);
  const origin =
    map?.from === "rig"
      ? "Proposed from what the rig remembers."
      : "Proposed from the columns’ names.";
  if (file.ownMap) {
    return (
      <div className="mb-2 flex flex-wrap items-center justify-between gap-x-2 text-sm text-ink-2">
        <p>A map of its own.</p>
        <Button onClick={() => change((now) => shareMapAgain(now, file.id))} type="button">
          Share the others’ map again
        </Button>
      </div>
    );
  }
  if (!first) return <p className="mb-2 text-sm text-ink-2">{origin}</p>;
  return (
    <div className="mb-2 text-sm text-ink-2">
      <p>
        {origin} Same columns as <span className="font-mono">{first.name}</span>
        {others.length > 0 ? ` and ${countOf(others.length, "other file")}` : ""}: same map.
      </p>
      <Button
        className="mt-1"
        onClick={() => change((now) => giveOwnMap(now, study, file.id))}
        type="button"
      >
        Give this file its own map
      </Button>
    </div>
  );
}

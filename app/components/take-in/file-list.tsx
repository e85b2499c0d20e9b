import { useState } from "react";
import { Link } from "react-router";
import { Button } from "#app/components/button.tsx";
import { SelectField, TextField } from "#app/components/field.tsx";
import { StateMark } from "#app/components/state-mark.tsx";
import {
  type BatchFile,
  mayChange,
  nameWarning,
  type Place,
  type Standing,
  setPlace,
  standingOf,
  type TakeInStudy,
} from "./batch.ts";
import { standingInWords } from "./standing-words.ts";
import type { TakeIn } from "./use-take-in.ts";

const COLUMNS =
  "xl:grid-cols-[minmax(0,1fr)_5.5rem_7.5rem_6.75rem_8.5rem_1.5rem] xl:gap-x-2 xl:gap-y-0";

/** One line a file: its name, where it belongs, and how it stands. */
export function FileList({ takeIn, study }: { takeIn: TakeIn; study: TakeInStudy }) {
  const { batch } = takeIn;
  const open = batch.files.filter((file) => isOpenTo(file, standingOf(batch, study, file)));
  const openIds = open.map(({ id }) => id);
  return (
    <>
      <div
        aria-hidden="true"
        className={`hidden border-b border-rule pb-1 text-sm text-ink-2 xl:grid ${COLUMNS}`}
      >
        <span>file</span>
        <span>participant</span>
        <span>condition</span>
        <span>posture</span>
        <span>day of the visit</span>
      </div>
      {open.length > 1 ? (
        <ForAll
          count={open.length}
          onChange={(place) => takeIn.change((now) => setPlace(now, openIds, place))}
          study={study}
        />
      ) : null}
      <ul aria-label="Files">
        {batch.files.map((file) => (
          <FileRow
            file={file}
            isChosen={file.id === takeIn.chosenId}
            key={file.id}
            standing={standingOf(batch, study, file)}
            study={study}
            takeIn={takeIn}
          />
        ))}
      </ul>
    </>
  );
}

/** Whether there is anything to say of where a file belongs. */
function isOpenTo(file: BatchFile, standing: Standing): boolean {
  return mayChange(file) && standing.kind !== "held" && standing.kind !== "same";
}

/** Says one thing of every file that may still be changed. */
function ForAll({
  count,
  study,
  onChange,
}: {
  count: number;
  study: TakeInStudy;
  onChange: (place: Partial<Place>) => void;
}) {
  const [day, setDay] = useState("");
  const options = placeOptions(study);
  return (
    <fieldset
      className={`grid grid-cols-2 items-center gap-2 border-b border-rule py-1.5 ${COLUMNS}`}
    >
      <legend className="sr-only">For all {count} files</legend>
      <span className="col-span-2 text-ink-2 xl:col-span-1">for all {count} files</span>
      {(["participantId", "conditionId", "postureId"] as const).map((field) => (
        <SelectField
          key={field}
          label={`${WORDS[field]} for all files`}
          labelHidden
          onChange={(event) => {
            if (event.currentTarget.value !== "") onChange({ [field]: event.currentTarget.value });
          }}
          options={options[field]}
          placeholder={SHORT[field]}
          value=""
        />
      ))}
      <TextField
        label="Day of the visit for all files"
        labelHidden
        max={study.lastDay}
        onChange={(event) => {
          setDay(event.currentTarget.value);
          // A year is typed digit by digit: "0020-12-01" is on its way to 2026.
          if (event.currentTarget.value >= "1970") onChange({ day: event.currentTarget.value });
        }}
        type="date"
        value={day}
      />
    </fieldset>
  );
}

const WORDS = {
  participantId: "Participant",
  conditionId: "Condition",
  postureId: "Posture",
} as const;
const SHORT = { participantId: "each", conditionId: "each its own", postureId: "each" } as const;

function placeOptions(study: TakeInStudy) {
  return {
    participantId: study.participants.map(({ id, code }) => ({ value: id, label: code })),
    conditionId: study.conditions.map(({ id, name }) => ({ value: id, label: name })),
    postureId: study.postures.map(({ id, name }) => ({ value: id, label: name })),
  };
}

function FileRow({
  file,
  study,
  standing,
  isChosen,
  takeIn,
}: {
  file: BatchFile;
  study: TakeInStudy;
  standing: Standing;
  isChosen: boolean;
  takeIn: TakeIn;
}) {
  const options = placeOptions(study);
  const isOpen = isOpenTo(file, standing);
  const set = (place: Partial<Place>) => takeIn.change((now) => setPlace(now, [file.id], place));
  return (
    <li
      aria-current={isChosen ? "true" : undefined}
      className="relative -mx-2 border-b border-rule px-2 pt-1.5 pb-1 aria-[current]:bg-hover"
    >
      <div className={`grid grid-cols-2 items-center gap-2 ${COLUMNS}`}>
        <button
          className={`col-span-2 min-h-6 min-w-0 truncate text-left font-mono text-figure decoration-edge underline-offset-3 hover:underline xl:col-span-1 ${
            isChosen ? "font-semibold" : ""
          }`}
          onClick={() => takeIn.choose(file.id)}
          title={file.name}
          type="button"
        >
          {file.name}
        </button>
        {isOpen ? (
          <>
            {(["participantId", "conditionId", "postureId"] as const).map((field) => (
              <SelectField
                key={field}
                label={
                  <>
                    {WORDS[field]}
                    <span className="sr-only"> of {file.name}</span>
                  </>
                }
                labelHidden
                onChange={(event) => set({ [field]: event.currentTarget.value })}
                options={options[field]}
                placeholder="which"
                value={file.place[field]}
              />
            ))}
            <TextField
              label={`Day of the visit of ${file.name}`}
              labelHidden
              max={study.lastDay}
              onChange={(event) => set({ day: event.currentTarget.value })}
              type="date"
              value={file.place.day}
            />
          </>
        ) : standing.kind === "held" || standing.kind === "same" ? (
          <span className="hidden xl:col-span-4 xl:block" />
        ) : (
          <PlaceInWords file={file} study={study} />
        )}
        {standing.kind === "verifying" ? (
          <span />
        ) : (
          <Button
            aria-label={`Take ${file.name} off the list`}
            className="absolute top-1.5 right-2 xl:static"
            look="quiet"
            onClick={() => takeIn.remove([file.id])}
            type="button"
          >
            ×
          </Button>
        )}
      </div>
      <StandingLine file={file} standing={standing} takeIn={takeIn} />
      {isOpen && nameWarning(study, file.name) !== null ? (
        <p className="text-sm font-semibold">
          The file’s name seems to tell who was recorded: look at it before you take it in.
        </p>
      ) : null}
    </li>
  );
}

/** What was said of a file that is on its way. */
function PlaceInWords({ file, study }: { file: BatchFile; study: TakeInStudy }) {
  const { participantId, conditionId, postureId, day } = file.place;
  const of = <Row extends { id: string }>(rows: readonly Row[], id: string) =>
    rows.find((row) => row.id === id);
  return (
    <>
      <span className="font-mono text-figure">{of(study.participants, participantId)?.code}</span>
      <span className="truncate">{of(study.conditions, conditionId)?.name}</span>
      <span className="truncate">{of(study.postures, postureId)?.name}</span>
      <span className="font-mono text-figure">{day}</span>
    </>
  );
}

/** The words, the link that goes with them, and what can be done about it. */
function StandingLine({
  file,
  standing,
  takeIn,
}: {
  file: BatchFile;
  standing: Standing;
  takeIn: TakeIn;
}) {
  const isWeighty = ["needs_you", "refused", "broken"].includes(standing.kind);
  const share = standing.kind === "sending" ? standing.share : 0;
  return (
    <>
      <p
        className={`flex min-h-6 flex-wrap items-center gap-x-2 gap-y-1 text-sm ${
          standing.kind === "broken" ? "py-1" : ""
        }`}
      >
        {standing.kind === "ready" ? <StateMark silent state="recorded" /> : null}
        <span className={isWeighty ? "text-ink" : "text-ink-2"}>
          {isWeighty ? <Weighty words={standingInWords(standing)} /> : standingInWords(standing)}
        </span>
        {standing.kind === "ready" ? (
          <Link
            className="link inline-flex min-h-6 items-center"
            to={`/recordings/${standing.recordingId}`}
          >
            Open the recording<span className="sr-only"> {file.name}</span>
          </Link>
        ) : null}
        {standing.kind === "held" ? (
          <Link
            className="link inline-flex min-h-6 items-center"
            to={`/recordings/${standing.recording.id}`}
          >
            Open it<span className="sr-only">, the recording {standing.recording.fileName}</span>
          </Link>
        ) : null}
        {standing.kind === "waiting" || standing.kind === "sending" ? (
          <Button
            aria-label={`Cancel the upload of ${file.name}`}
            look="quiet"
            onClick={() => takeIn.stop([file.id])}
            type="button"
          >
            Cancel
          </Button>
        ) : null}
        {standing.kind === "broken" ? (
          <>
            <Button
              aria-label={`Continue the upload of ${file.name}`}
              onClick={() => takeIn.take([file.id])}
              type="button"
            >
              Continue
            </Button>
            <Button
              aria-label={`Give up the upload of ${file.name}`}
              look="quiet"
              onClick={() => takeIn.stop([file.id])}
              type="button"
            >
              Give up
            </Button>
          </>
        ) : null}
        {standing.kind === "refused" && file.sending.status === "refused" ? (
          <Button onClick={() => takeIn.take([file.id])} type="button">
            Try again<span className="sr-only"> to take in {file.name}</span>
          </Button>
        ) : null}
      </p>
      {share > 0 ? (
        <div
          aria-hidden="true"
          className="absolute bottom-[-1px] left-0 h-0.5 bg-ink"
          style={{ width: `${100 * share}%` }}
        />
      ) : null}
    </>
  );
}

/** "needs you: participant": the first words carry the weight. */
function Weighty({ words }: { words: string }) {
  const at = words.indexOf(":");
  return (
    <>
      <span className="font-semibold">{words.slice(0, at)}</span>
      {words.slice(at)}
    </>
  );
}

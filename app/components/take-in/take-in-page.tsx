import type { ReactNode } from "react";
import { Link } from "react-router";
import { Button } from "#app/components/button.tsx";
import { Cautions } from "#app/components/cautions.tsx";
import { TextField } from "#app/components/field.tsx";
import { Mark } from "#app/components/mark.tsx";
import { fileNamePatternProblem } from "#app/domain/file-name.ts";
import { countOf, formatBytes } from "#app/domain/quantity.ts";
import {
  type BatchStanding,
  findFile,
  setPattern,
  standingOf,
  standingOfAll,
  type TakeInStudy,
} from "./batch.ts";
import { ChooseFiles, DropArea } from "./choose-files.tsx";
import { FileDrawer } from "./file-drawer.tsx";
import { FileList } from "./file-list.tsx";
import { percent, reasonInWords } from "./standing-words.ts";
import type { TakeIn } from "./use-take-in.ts";

/** The list of files at the left, the chosen one in the drawer, and one button for all. */
export function TakeInPage({
  head,
  study,
  takeIn,
  recordingsPath,
}: {
  head: ReactNode;
  study: TakeInStudy;
  takeIn: TakeIn;
  recordingsPath: string;
}) {
  const { batch } = takeIn;
  const chosen = findFile(batch, takeIn.chosenId);
  if (batch.files.length === 0) {
    return (
      <DropArea className="flex min-h-dvh flex-col px-5 pt-4 pb-6" onFiles={takeIn.add}>
        {head}
        <div className="flex min-h-80 grow flex-col items-center justify-center gap-4 border border-dashed border-edge px-4 py-10 text-center">
          <span className="text-aside">
            <Mark size="sketch" />
          </span>
          <p className="max-w-prose">
            Drop recordings here: CSV, TSV or other text, as many as a visit has. Each will stand
            here with its participant, condition and posture, and with the first movement in words,
            for you to confirm. No file leaves this computer before you take it in.
          </p>
          <ChooseFiles look="do" onFiles={takeIn.add} />
        </div>
        <div className="mt-4">
          <Cautions />
        </div>
      </DropArea>
    );
  }
  const all = standingOfAll(batch, study);
  return (
    <div className="grid min-h-dvh lg:grid-cols-[minmax(0,1fr)_22rem] xl:grid-cols-[minmax(0,1fr)_23.5rem]">
      <DropArea className="flex min-w-0 flex-col px-5 pt-4" onFiles={takeIn.add}>
        {head}
        <div className="mb-3 flex flex-wrap items-start justify-between gap-x-6 gap-y-2">
          <p className="flex flex-wrap items-center gap-x-3">
            <ChooseFiles look="plain" onFiles={takeIn.add} />
            <span className="text-ink-2">or drop more here</span>
          </p>
          <PatternField study={study} takeIn={takeIn} />
        </div>
        <FileList study={study} takeIn={takeIn} />
        <div className="mt-4 mb-4 grow">
          <Cautions />
        </div>
        <TakeInBar all={all} recordingsPath={recordingsPath} study={study} takeIn={takeIn} />
      </DropArea>
      <aside
        aria-label="The chosen file"
        className="min-w-0 border-t border-rule bg-sheet p-4 lg:sticky lg:top-0 lg:h-dvh lg:overflow-y-auto lg:border-t-0 lg:border-l"
      >
        {chosen ? (
          <FileDrawer
            actions={
              <>
                <NextButton all={all} takeIn={takeIn} />
                <a className="link inline-flex min-h-[30px] items-center lg:hidden" href="#main">
                  Back to the list
                </a>
              </>
            }
            file={chosen}
            study={study}
            takeIn={takeIn}
          />
        ) : (
          <p className="text-ink-2">Choose a file of the list to see what it holds.</p>
        )}
      </aside>
    </div>
  );
}

function PatternField({ study, takeIn }: { study: TakeInStudy; takeIn: TakeIn }) {
  const { pattern } = takeIn.batch;
  return (
    <div className="w-full sm:w-88">
      <div className="flex items-baseline gap-2">
        <span aria-hidden="true" className="shrink-0 text-ink-2">
          file names
        </span>
        <div className="grow">
          <TextField
            autoComplete="off"
            className="font-mono text-figure"
            error={pattern.trim() === "" ? null : fileNamePatternProblem(pattern.trim())}
            label="Pattern of the file names"
            labelHidden
            onChange={(event) => {
              const next = event.currentTarget.value;
              takeIn.change((now) => setPattern(now, study, next));
            }}
            placeholder="{participant}_{condition}_{repeat}"
            spellCheck={false}
            title="Words in braces: participant, condition, posture, axis, repeat, any. Kept with the study."
            value={pattern}
          />
        </div>
      </div>
    </div>
  );
}

/** What happens to the whole list, always in sight. */
function TakeInBar({
  all,
  study,
  takeIn,
  recordingsPath,
}: {
  all: BatchStanding;
  study: TakeInStudy;
  takeIn: TakeIn;
  recordingsPath: string;
}) {
  const { batch } = takeIn;
  const waiting = batch.files
    .filter(({ id }) => all.needYou.includes(id))
    .map((file) => ({ name: file.name, standing: standingOf(batch, study, file) }));
  const reason = reasonInWords({
    waiting,
    good: all.good.length,
    reading: all.reading,
    underWay: all.underWay.length + all.broken.length,
  });
  const isUnderWay = all.underWay.length > 0;
  const share = all.askedBytes === 0 ? 0 : all.sentBytes / all.askedBytes;
  const done = batch.files
    .filter((file) => ["ready", "held", "same"].includes(standingOf(batch, study, file).kind))
    .map(({ id }) => id);
  return (
    <div className="sticky bottom-0 z-1 -mx-5 mt-auto border-t border-rule bg-paper px-5 py-3">
      {isUnderWay ? (
        <div
          aria-hidden="true"
          className="absolute top-[-1px] left-0 h-0.5 bg-ink"
          style={{ width: `${100 * share}%` }}
        />
      ) : null}
      <div className="flex flex-wrap items-center justify-between gap-x-4 gap-y-2">
        <div className="min-w-0 flex-1 basis-64 text-sm">
          <p role="status">
            {all.asked > 0 ? (
              <>
                {all.ready} of {all.asked} ready
                {isUnderWay ? (
                  <>
                    , <span className="font-mono">{percent(share)}</span> of{" "}
                    <span className="font-mono">{formatBytes(all.askedBytes)}</span> sent
                  </>
                ) : null}
                .{" "}
              </>
            ) : null}
            {all.ready > 0 && !isUnderWay ? (
              <Link className="link" to={recordingsPath}>
                See the study’s recordings
              </Link>
            ) : null}
          </p>
          <p className="text-ink-2" id="why-not-all">
            {reason}
          </p>
        </div>
        <div className="flex flex-wrap gap-2">
          {done.length > 0 && !isUnderWay ? (
            <Button onClick={() => takeIn.remove(done)} type="button">
              Clear what is done
            </Button>
          ) : null}
          {all.broken.length > 0 ? (
            <Button onClick={() => takeIn.take(all.broken)} type="button">
              Continue {countOf(all.broken.length, "upload")}
            </Button>
          ) : null}
          {all.unsent.length > 0 ? (
            <Button onClick={() => takeIn.stop(all.unsent)} type="button">
              Cancel all uploads
            </Button>
          ) : null}
          <Button
            aria-describedby={reason ? "why-not-all" : undefined}
            disabled={all.good.length === 0}
            look="do"
            onClick={() => takeIn.take(all.good)}
            type="button"
          >
            {all.good.length === 0
              ? "Take in files"
              : `Take in ${countOf(all.good.length, "file")}`}
          </Button>
        </div>
      </div>
    </div>
  );
}

/** Goes through the files that need a person, one after the other. */
function NextButton({ all, takeIn }: { all: BatchStanding; takeIn: TakeIn }) {
  const { files } = takeIn.batch;
  const at = files.findIndex(({ id }) => id === takeIn.chosenId);
  const inOrder = [...files.slice(at + 1), ...files.slice(0, Math.max(0, at))];
  const next = inOrder.find(({ id }) => all.needYou.includes(id));
  if (!next) return null;
  return (
    <Button onClick={() => takeIn.choose(next.id)} type="button">
      Next file that needs you
    </Button>
  );
}

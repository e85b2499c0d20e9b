import { type DragEvent, type ReactNode, useRef, useState } from "react";
import { Mark } from "#app/components/mark.tsx";

/** The usual endings; a browser lets a person choose others too. */
const ENDINGS = ".csv,.tsv,.txt,.dat,.asc";

/** The browser's own field for files, drawn as a button. */
export function ChooseFiles({
  onFiles,
  look,
}: {
  onFiles: (files: File[]) => void;
  look: "do" | "plain";
}) {
  return (
    <label
      className={`inline-flex min-h-[30px] items-center rounded border px-2.5 py-1 whitespace-nowrap has-focus-visible:outline-2 has-focus-visible:outline-offset-2 has-focus-visible:outline-focus ${
        look === "do"
          ? "border-ink bg-ink text-paper hover:bg-ink/90"
          : "border-edge bg-sheet hover:bg-hover"
      }`}
    >
      Choose recordings
      <input
        accept={ENDINGS}
        className="sr-only"
        multiple
        onChange={(event) => {
          onFiles([...(event.currentTarget.files ?? [])]);
          // The same file can be chosen again after it was taken off the list.
          event.currentTarget.value = "";
        }}
        type="file"
      />
    </label>
  );
}

/** Takes what is dropped anywhere on it; while files hang over it, it says so. */
export function DropArea({
  onFiles,
  className,
  children,
}: {
  onFiles: (files: File[]) => void;
  className: string;
  children: ReactNode;
}) {
  const [isOver, setIsOver] = useState(false);
  // Entering a child leaves its parent: the area is left when all are.
  const depth = useRef(0);
  const holdsFiles = (event: DragEvent) => event.dataTransfer.types.includes("Files");
  return (
    <section
      aria-label="Recordings to take in"
      className={`relative ${className}`}
      onDragEnter={(event) => {
        if (!holdsFiles(event)) return;
        event.preventDefault();
        depth.current += 1;
        setIsOver(true);
      }}
      onDragLeave={() => {
        depth.current = Math.max(0, depth.current - 1);
        if (depth.current === 0) setIsOver(false);
      }}
      onDragOver={(event) => {
        if (!holdsFiles(event)) return;
        event.preventDefault();
        event.dataTransfer.dropEffect = "copy";
      }}
      onDrop={(event) => {
        if (!holdsFiles(event)) return;
        event.preventDefault();
        depth.current = 0;
        setIsOver(false);
        filesOf(event.dataTransfer).then(onFiles);
      }}
    >
      {children}
      {isOver ? (
        <div className="pointer-events-none absolute inset-0 z-10 border-2 border-ink bg-paper/95">
          <p className="sticky top-0 flex h-[min(100%,100dvh)] flex-col items-center justify-center gap-4 font-semibold">
            <Mark size="sketch" />
            Let go to put them on the list
          </p>
        </div>
      ) : null}
    </section>
  );
}

/** All files that were dropped, those in folders too. */
async function filesOf(transfer: DataTransfer): Promise<File[]> {
  const entries = [...transfer.items].map((item) => item.webkitGetAsEntry());
  if (entries.some((entry) => entry?.isDirectory)) {
    return (await Promise.all(entries.map((entry) => filesBelow(entry)))).flat();
  }
  return [...transfer.files];
}

async function filesBelow(entry: FileSystemEntry | null): Promise<File[]> {
  if (entry === null || entry.name.startsWith(".")) return [];
  if (isFile(entry)) {
    return [await new Promise<File>((resolve, reject) => entry.file(resolve, reject))];
  }
  if (!isFolder(entry)) return [];
  const reader = entry.createReader();
  const files: File[] = [];
  for (;;) {
    // A reader hands out a folder in pieces, and an empty one at the end.
    const entries = await new Promise<FileSystemEntry[]>((resolve, reject) =>
      reader.readEntries(resolve, reject),
    );
    if (entries.length === 0) return files;
    files.push(...(await Promise.all(entries.map(filesBelow))).flat());
  }
}

function isFile(entry: FileSystemEntry): entry is FileSystemFileEntry {
  return entry.isFile;
}

function isFolder(entry: FileSystemEntry): entry is FileSystemDirectoryEntry {
  return entry.isDirectory;
}

import { Key } from "#app/components/button.tsx";
import { Dialog } from "#app/components/dialog.tsx";
import { CheckField } from "#app/components/field.tsx";

const KEYS: readonly { keys: readonly string[]; what: string; edits?: true }[] = [
  { keys: ["←", "→"], what: "previous, next window" },
  { keys: ["[", "]"], what: "go to the window’s start, end", edits: true },
  {
    keys: ["←", "→"],
    what: "there: trim by one sample (Shift, Page up, Page down: ten)",
    edits: true,
  },
  { keys: ["X"], what: "set the window aside, or take it back", edits: true },
  { keys: ["O"], what: "start the window at its onset", edits: true },
  { keys: ["T"], what: "use this trim for all windows of the axis", edits: true },
  { keys: ["A"], what: "add a window by hand, at the cursor", edits: true },
  { keys: [",", "."], what: "move the cursor by one sample (Shift: ten)" },
  { keys: ["+", "−"], what: "zoom in, out" },
  { keys: ["0"], what: "back to the chosen window" },
  { keys: ["R"], what: "the whole recording" },
  { keys: ["1", "2"], what: "first, second axis" },
  { keys: ["V"], what: "show the traces as a table" },
  { keys: ["Z"], what: "undo (Shift: redo)", edits: true },
  { keys: ["S"], what: "save", edits: true },
  { keys: ["?"], what: "this list" },
];

/** What the keys do here; single keys can be switched off for who dictates or leans on them. */
export function KeysDialog({
  open,
  onClose,
  canEdit,
  enabled,
  onEnable,
}: {
  open: boolean;
  onClose: () => void;
  canEdit: boolean;
  enabled: boolean;
  onEnable: (enabled: boolean) => void;
}) {
  return (
    <Dialog onClose={onClose} open={open} title="Keys on this page">
      <dl className="grid grid-cols-[auto_1fr] items-baseline gap-x-4 gap-y-1.5">
        {KEYS.filter((line) => canEdit || !line.edits).map(({ keys, what }) => (
          <div className="contents" key={what}>
            <dt className="flex gap-1">
              {keys.map((key) => (
                <Key key={key} spoken>
                  {key}
                </Key>
              ))}
            </dt>
            <dd>{what}</dd>
          </div>
        ))}
      </dl>
      <CheckField
        checked={enabled}
        className="mt-4"
        hint="Kept on this computer. Arrow keys on an edge always work."
        label="Single keys work on this page"
        onChange={(event) => onEnable(event.target.checked)}
      />
    </Dialog>
  );
}

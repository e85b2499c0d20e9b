import { Key } from "#app/components/button.tsx";
import { Dialog } from "#app/components/dialog.tsx";
import { CheckField } from "#app/components/field.tsx";

export interface KeyLine {
  keys: readonly string[];
  what: string;
}

/** What the keys do here; single keys can be switched off for who dictates or leans on them. */
export function KeysDialog({
  open,
  onClose,
  lines,
  enabled,
  onEnable,
}: {
  open: boolean;
  onClose: () => void;
  lines: readonly KeyLine[];
  enabled: boolean;
  onEnable: (enabled: boolean) => void;
}) {
  return (
    <Dialog onClose={onClose} open={open} title="Keys on this page">
      <dl className="grid grid-cols-[auto_1fr] items-baseline gap-x-4 gap-y-1.5">
        {lines.map(({ keys, what }) => (
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
        hint="Kept on this computer. What has the focus keeps its own keys."
        label="Single keys work on this page"
        onChange={(event) => onEnable(event.target.checked)}
      />
    </Dialog>
  );
}

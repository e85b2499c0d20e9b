import { type ReactNode, useEffect, useRef } from "react";
import { Button } from "./button.tsx";

/**
 * The browser's own dialog: it keeps the focus inside, gives it back on closing, and Escape closes
 * it. Rendered always; `open` shows it.
 */
export function Dialog({
  open,
  onClose,
  title,
  children,
  actions,
}: {
  open: boolean;
  onClose: () => void;
  title: string;
  children: ReactNode;
  /** Buttons beside "Close". */
  actions?: ReactNode;
}) {
  const element = useRef<HTMLDialogElement>(null);

  useEffect(() => {
    const dialog = element.current;
    if (!dialog) return;
    if (open && !dialog.open) dialog.showModal();
    if (!open && dialog.open) dialog.close();
  }, [open]);

  return (
    <dialog
      aria-label={title}
      className="m-auto max-h-[85dvh] w-[min(36rem,calc(100vw-2rem))] overflow-y-auto rounded border border-edge bg-sheet p-4 text-ink shadow-lifted backdrop:bg-[rgb(0_0_0/0.4)]"
      onClose={onClose}
      ref={element}
    >
      <h2>{title}</h2>
      <div className="my-3">{children}</div>
      <div className="flex flex-wrap justify-end gap-2">
        <Button onClick={onClose} type="button">
          Close
        </Button>
        {actions}
      </div>
    </dialog>
  );
}

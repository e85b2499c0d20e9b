import { type RefObject, useLayoutEffect, useRef, useState } from "react";

/**
 * The width of the element that a figure stands in, px, so that its words keep their size: a figure
 * is laid out again, never scaled.
 *
 * @param before  width to draw with until the page is measured (and on the server)
 */
export function useWidth<T extends HTMLElement>(before: number): [RefObject<T | null>, number] {
  const element = useRef<T>(null);
  const [width, setWidth] = useState(before);
  useIsomorphicLayoutEffect(() => {
    const measured = element.current;
    if (!measured) return;
    const measure = () => {
      if (measured.clientWidth > 0) setWidth(measured.clientWidth);
    };
    measure();
    const observer = new ResizeObserver(measure);
    observer.observe(measured);
    return () => observer.disconnect();
  }, []);
  return [element, width];
}

const nothing = () => undefined;
/** The server has no layout; React warns about layout effects there. */
const useIsomorphicLayoutEffect: typeof useLayoutEffect =
  typeof document === "undefined" ? nothing : useLayoutEffect;

/** The ogee: flat, smooth rise, flat. The one mark of the product and its only ornament. */

const SIZES = {
  /** Beside the name. */
  brand: { width: 36, height: 14, stroke: 2 },
  /** Marks the current place in the navigation. */
  place: { width: 22, height: 9, stroke: 2 },
  /** Stands in an empty state. */
  sketch: { width: 132, height: 48, stroke: 1 },
} as const;

export function Mark({ size = "brand" }: { size?: keyof typeof SIZES }) {
  const { width, height, stroke } = SIZES[size];
  return (
    <svg
      aria-hidden="true"
      className="inline-block shrink-0"
      fill="none"
      height={height}
      viewBox="0 0 44 16"
      width={width}
    >
      <path d="M1 13H13C22 13 22 3 31 3H43" stroke="currentColor" strokeWidth={stroke} />
    </svg>
  );
}

/** The slanted grey lines of what is set aside; drawn in `text-aside`. */
export function Hatch({ id }: { id: string }) {
  return (
    <pattern
      height="6"
      id={id}
      patternTransform="rotate(45)"
      patternUnits="userSpaceOnUse"
      width="6"
    >
      <path d="M0 0V6" stroke="var(--aside)" strokeWidth="2" />
    </pattern>
  );
}

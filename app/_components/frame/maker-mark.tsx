/** The mark: one meander of a strain gauge's foil. */
export function MakerMark({ size = 22 }: { size?: number }) {
  return (
    <svg
      width={size}
      height={size}
      viewBox="0 0 22 22"
      fill="none"
      stroke="currentColor"
      strokeWidth="1.6"
      aria-hidden="true"
      className="flex-none text-copper"
    >
      <path d="M3 3v13a2 2 0 0 0 4 0V6a2 2 0 0 1 4 0v10a2 2 0 0 0 4 0V6a2 2 0 0 1 4 0v13" />
    </svg>
  );
}

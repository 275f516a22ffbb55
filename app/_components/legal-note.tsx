/** Stands wherever an accuracy envelope is shown: what this tool computes is not proof of a class. */
export function LegalNote() {
  return (
    <p className="text-sm text-ink-soft">
      Weighing instruments used in trade are under legal metrology. A temperature class is proven by type approval and
      verification under the local rules, not by what is computed here; the body licensed for it decides.
    </p>
  );
}

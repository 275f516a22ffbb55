const CAUTIONS = [
  [
    "Hot and cold surfaces",
    "Chamber walls, racks, fixtures and devices burn or freeze to skin: gloves and eye protection as your site asks for.",
  ],
  [
    "Hanging and standing loads",
    "Nobody under or beside a load in motion. Check hooks, slings and stops before each load; never above the capacity.",
  ],
  [
    "Condensation",
    "A cold device draws moisture. Let it warm up dry before it is switched on, and before the door is opened to humid air.",
  ],
  [
    "Closed spaces and gases",
    "Chambers cooled by liquefied gas can displace breathable air: follow the maker's instructions on venting.",
  ],
] as const;

/** The usual cautions at a chamber; they replace no procedure of the site. */
export function Cautions() {
  return (
    <section className="mt-4 border-2 border-ink px-4 py-3" aria-label="Cautions">
      <h2 className="text-sm font-[650]">Before you begin</h2>
      <ul className="mt-1 grid gap-x-6 gap-y-1 text-xs sm:grid-cols-2 print:grid-cols-2">
        {CAUTIONS.map(([what, how]) => (
          <li key={what}>
            <b>{what}.</b> {how}
          </li>
        ))}
      </ul>
      <p className="mt-2 text-xs font-semibold">
        The safety procedures of your site and the instructions of the makers of chamber, loads and devices come first;
        this sheet replaces none of them.
      </p>
    </section>
  );
}

import Form from "next/form";

/** Id of the search input, for the keys that focus it. */
export const searchId = "serial-search";

/** Search that is always there. Enter asks `/trace?q=`, which goes on to the serial, lot or package that it names. */
export function SerialSearch() {
  return (
    <search className="ml-auto min-w-0 flex-1 md:max-w-[290px]">
      <Form action="/trace" className="relative">
        <label htmlFor={searchId} className="sr-only">
          Serial, lot or package
        </label>
        <input
          id={searchId}
          name="q"
          type="search"
          required
          maxLength={80}
          autoComplete="off"
          autoCapitalize="characters"
          spellCheck={false}
          placeholder="Serial, lot or package"
          className="h-8 w-full rounded border border-rule bg-paper pr-8 pl-2.5 [&::-webkit-search-cancel-button]:hidden"
        />
        <span
          aria-hidden="true"
          className="pointer-events-none absolute top-1.5 right-2 hidden rounded border border-rule px-1.5 font-mono text-xs leading-[18px] text-ink-soft md:block"
        >
          /
        </span>
      </Form>
    </search>
  );
}

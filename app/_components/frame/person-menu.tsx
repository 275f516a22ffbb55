"use client";

import { ChevronDown, Menu } from "lucide-react";
import Link from "next/link";
import { usePathname } from "next/navigation";
import { DropdownMenu } from "radix-ui";
import { problemOf } from "@/app/_components/api-client";
import { signOut } from "@/app/_components/auth-client";
import { showKeysEvent } from "@/app/_components/frame/keys";
import { isInPlace, placesOf } from "@/app/_components/frame/places";
import { useTheme } from "@/app/_components/frame/use-theme";
import { useToast } from "@/app/_components/toast";

export interface FramePerson {
  name: string;
  roles: readonly string[];
}

const itemLook =
  "flex w-full items-center gap-2 rounded px-3 py-2 text-ink no-underline outline-none hover:text-ink data-highlighted:bg-tint data-[state=checked]:font-semibold md:py-1.5";

/** What stands under the person: the rest of the places by role, the theme, the keys, the way out. */
export function PersonMenu({ person }: { person: FramePerson }) {
  const path = usePathname();
  const links = linksFor(person.roles);
  const tell = useToast();

  async function leave() {
    try {
      await signOut();
      window.location.assign("/sign-in?out=1"); // a new page load: nothing of this person stays in memory
    } catch (error) {
      const { title, detail } = problemOf(error);
      tell({ tone: "bad", title: "You are still signed in", text: detail ?? title });
    }
  }

  return (
    <DropdownMenu.Root>
      <DropdownMenu.Trigger
        aria-label={`Menu of ${person.name}`}
        className="flex h-9 flex-none items-center gap-1.5 rounded px-1 text-ink-soft hover:text-ink"
      >
        <span className="hidden md:inline">
          {person.name}
          <span className="hidden lg:inline"> · {person.roles.join(", ")}</span>
        </span>
        <ChevronDown size={16} aria-hidden className="hidden md:block" />
        <Menu size={22} aria-hidden className="md:hidden" />
      </DropdownMenu.Trigger>
      <DropdownMenu.Portal>
        <DropdownMenu.Content
          align="end"
          sideOffset={8}
          collisionPadding={12}
          className="z-40 max-h-(--radix-dropdown-menu-content-available-height) min-w-60 overflow-y-auto rounded border border-rule bg-raised p-1.5 shadow-(--overlay-shadow)"
        >
          <div className="px-3 py-2 md:hidden">
            <div className="font-semibold">{person.name}</div>
            <div className="text-xs text-ink-soft">{person.roles.join(", ")}</div>
          </div>
          <div className="border-b border-rule pb-1.5 mb-1.5 md:hidden">
            {placesOf(person.roles).map((place) => (
              <DropdownMenu.Item key={place.href} asChild>
                <Link href={place.href} className={`${itemLook} ${isInPlace(place, path) ? "font-semibold" : ""}`}>
                  {place.name}
                </Link>
              </DropdownMenu.Item>
            ))}
          </div>
          {links.map((link) => (
            <DropdownMenu.Item key={link.href} asChild>
              <Link href={link.href} className={itemLook}>
                {link.name}
              </Link>
            </DropdownMenu.Item>
          ))}
          <DropdownMenu.Separator className="my-1.5 h-px bg-rule" />
          <ThemeItems />
          <DropdownMenu.Separator className="my-1.5 h-px bg-rule" />
          <DropdownMenu.Item
            className={`${itemLook} hidden md:flex`}
            onSelect={() => window.dispatchEvent(new Event(showKeysEvent))}
          >
            Keys
            <kbd className="ml-auto rounded border border-rule px-1.5 font-mono text-xs text-ink-soft">?</kbd>
          </DropdownMenu.Item>
          <DropdownMenu.Item className={itemLook} onSelect={() => void leave()}>
            Sign out
          </DropdownMenu.Item>
        </DropdownMenu.Content>
      </DropdownMenu.Portal>
    </DropdownMenu.Root>
  );
}

function ThemeItems() {
  const [theme, setTheme] = useTheme();
  return (
    <DropdownMenu.RadioGroup value={theme} onValueChange={setTheme} className="flex items-center gap-0.5">
      <DropdownMenu.Label className="px-3 text-xs text-ink-soft">Theme</DropdownMenu.Label>
      {[
        { value: "system", name: "System" },
        { value: "light", name: "Light" },
        { value: "dark", name: "Dark" },
      ].map(({ value, name }) => (
        <DropdownMenu.RadioItem
          key={value}
          value={value}
          onSelect={(event) => event.preventDefault()}
          className="cursor-pointer rounded border border-transparent px-2 py-1 text-sm outline-none data-highlighted:bg-tint data-[state=checked]:border-copper data-[state=checked]:font-semibold data-[state=checked]:text-copper-strong"
        >
          {name}
        </DropdownMenu.RadioItem>
      ))}
    </DropdownMenu.RadioGroup>
  );
}

/** Operators see stations and devices only; people and mail are the admin's. */
function linksFor(roles: readonly string[]): { name: string; href: string }[] {
  const has = (role: string) => roles.includes(role);
  const onlyOperator = roles.every((role) => role === "operator");
  return [
    ...(has("operator") && !onlyOperator ? [{ name: "Bench", href: "/stations/bench" }] : []),
    ...(onlyOperator ? [] : [{ name: "Equipment", href: "/equipment" }]),
    ...(onlyOperator ? [] : [{ name: "Compare", href: "/compare" }]),
    ...(onlyOperator ? [] : [{ name: "Ledger", href: "/ledger" }]),
    ...(has("admin") ? [{ name: "People", href: "/people" }] : []),
    ...(has("admin") ? [{ name: "Mail", href: "/mail" }] : []),
    { name: "Account", href: "/account" },
  ];
}

import { describe, expect, it } from "vitest";
import { findPasswordFault } from "@/lib/domain/password-rule";

const fault = (password: string) => findPasswordFault(password, "r.hale@marram.example");

describe("a new password", () => {
  it.each(["twelve chars", "trim-demo-2026", "ünïcødé wörd", "harbour lamp cedar", "r.hale@marram.example!"])(
    "may be %s",
    (password) => expect(fault(password)).toBeUndefined(),
  );

  it.each([
    ["", /at least 12/],
    ["eleven char", /at least 12/],
    // Four signs that take two code units each.
    ["🔑🔒🔓🗝", /at least 12/],
    ["R.Hale@Marram.Example", /e-mail/],
    [" r.hale@marram.example ", /e-mail/],
    ["password1234", /first that anybody tries/],
    ["PassWord 1234", /first that anybody tries/],
    ["qwertyuiop123", /first that anybody tries/],
    ["abababababab", /first that anybody tries/],
    ["            ", /first that anybody tries/],
  ])("is not %j", (password, words) => expect(fault(password)).toMatch(words));
});

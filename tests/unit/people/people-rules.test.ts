import { describe, expect, it } from "vitest";
import { needsSecondAdmin, stepsToRoles, warningsOf } from "@/lib/domain/people-rules";
import { ROLES } from "@/lib/domain/roles";

describe("roles", () => {
  it("take two admins where they decide over others' work", () => {
    expect(ROLES.filter(needsSecondAdmin)).toEqual(["reviewer", "admin"]);
  });

  it("are asked for and ended so that the wanted ones are left", () => {
    expect(stepsToRoles(["engineer", "service"], ["service", "reviewer", "reviewer"])).toEqual({
      ask: ["reviewer"],
      end: ["engineer"],
    });
    expect(stepsToRoles(["admin"], ["admin"])).toEqual({ ask: [], end: [] });
  });

  it("are warned of below two people", () => {
    expect(warningsOf({ engineer: 2, reviewer: 2, admin: 3 })).toEqual([]);
    const warnings = warningsOf({ engineer: 0, reviewer: 1, admin: 2 });
    expect(warnings.map(({ role, count }) => [role, count])).toEqual([
      ["engineer", 0],
      ["reviewer", 1],
    ]);
    expect(warnings[0]?.message).toMatch(/^Nobody can act as engineer /);
    expect(warnings[1]?.message).toMatch(/^Only one person can act as reviewer /);
  });
});

import type { Migration } from "kysely";
import * as guards from "./20261201060000_guards";
import * as people from "./20261201060100_people";
import * as families from "./20261201060200_families";
import * as lots from "./20261201060300_lots";
import * as derivations from "./20261201060400_derivations";
import * as packages from "./20261201060500_packages";
import * as stations from "./20261201060600_stations";
import * as ledger from "./20261201060700_ledger";
import * as runPlans from "./20261201140000_run_plans";
import * as certificatesAndMappings from "./20261201141000_certificates_and_mappings";
import * as readingsByStatement from "./20261201141001_readings_by_statement";
import * as derivationStatements from "./20261201142000_derivation_statements";
import * as unfinishedLayouts from "./20261201150000_unfinished_layouts";
import * as readingGuardPlan from "./20261201155900_reading_guard_plan";
import * as valuesMadeAgain from "./20261201180000_values_made_again";

/** Every migration by name, in order. A static list, so that it works the same under tsx, vitest and the built app. */
export const migrations: Record<string, Migration> = {
  "20261201060000_guards": guards,
  "20261201060100_people": people,
  "20261201060200_families": families,
  "20261201060300_lots": lots,
  "20261201060400_derivations": derivations,
  "20261201060500_packages": packages,
  "20261201060600_stations": stations,
  "20261201060700_ledger": ledger,
  "20261201140000_run_plans": runPlans,
  "20261201141000_certificates_and_mappings": certificatesAndMappings,
  "20261201141001_readings_by_statement": readingsByStatement,
  "20261201142000_derivation_statements": derivationStatements,
  "20261201150000_unfinished_layouts": unfinishedLayouts,
  "20261201155900_reading_guard_plan": readingGuardPlan,
  "20261201180000_values_made_again": valuesMadeAgain,
};

import type { AnyCommand } from "./command";
import { accountCommands } from "./commands/account";
import { bundleCommands } from "./commands/bundles";
import { coefficientCommands } from "./commands/coefficients";
import { compareCommands } from "./commands/compare";
import { derivationCommands } from "./commands/derivations";
import { deviceCommands } from "./commands/devices";
import { equipmentCommands } from "./commands/equipment";
import { familyCommands } from "./commands/families";
import { imageCommands } from "./commands/images";
import { layoutCommands } from "./commands/layouts";
import { ledgerCommands } from "./commands/ledger";
import { lotCommands } from "./commands/lots";
import { mailCommands } from "./commands/mail";
import { openApiCommands } from "./commands/openapi";
import { packageCommands } from "./commands/packages";
import { peopleCommands } from "./commands/people";
import { proofCommands } from "./commands/proofs";
import { readingMappingCommands } from "./commands/reading-mappings";
import { rebuildCommands } from "./commands/rebuilds";
import { reinstatementCommands } from "./commands/reinstatements";
import { runPlanCommands } from "./commands/run-plans";
import { runCommands } from "./commands/runs";
import { sampleCommands } from "./commands/samples";
import { signingKeyCommands } from "./commands/signing-keys";
import { stationCommands } from "./commands/stations";
import { todayCommands } from "./commands/today";

/** Every command of the API, for the OpenAPI document and the tests. A route file without its command here fails a test. */
export const commands: readonly AnyCommand[] = [
  ...familyCommands,
  ...layoutCommands,
  ...equipmentCommands,
  ...readingMappingCommands,
  ...lotCommands,
  ...sampleCommands,
  ...runPlanCommands,
  ...runCommands,
  ...proofCommands,
  ...derivationCommands,
  ...coefficientCommands,
  ...packageCommands,
  ...rebuildCommands,
  ...reinstatementCommands,
  ...imageCommands,
  ...bundleCommands,
  ...compareCommands,
  ...signingKeyCommands,
  ...stationCommands,
  ...deviceCommands,
  ...ledgerCommands,
  ...todayCommands,
  ...peopleCommands,
  ...accountCommands,
  ...mailCommands,
  ...openApiCommands,
];

/** Two packages of one large lot: every device's gain is another in the second, by steps that scatter. */
import { seededRandom } from "@/lib/demo/random";
import { importCoefficients } from "@/lib/services/coefficients/import-coefficients";
import type { Ctx } from "@/lib/services/context";
import { addDevices } from "@/lib/services/lots/add-devices";
import { addLot } from "@/lib/services/lots/add-lot";
import { approveDerivation } from "../support/scenario/derived";
import { publishFamily, publishLayout, type ScenarioPeople } from "../support/scenario/family-lot";
import { firstGolden } from "../support/scenario/golden";
import { buildGolden } from "../support/scenario/packaged";

const SEED = 77;
/** Serials a call adds. */
const AT_ONCE = 10_000;

/** @returns ids of the older and the newer package. */
export async function makeTwoPackages(
  people: ScenarioPeople & { engineer: Ctx },
  code: string,
  count: number,
): Promise<{ from: string; to: string }> {
  const golden = firstGolden();
  const family = { ...golden.family, code: `${code}-F` };
  await publishFamily(people, family);
  await publishLayout(people, JSON.stringify({ ...JSON.parse(golden.layout), family: family.code }));
  await addLot(people.engineer, { code, family: family.code, firmware: golden.firmware });
  const serials = Array.from({ length: count }, (_, i) => `${code}-${String(i + 1).padStart(5, "0")}`);
  for (let at = 0; at < count; at += AT_ONCE) {
    await addDevices(people.engineer, { lot: code, serials: serials.slice(at, at + AT_ONCE) });
  }
  const random = seededRandom(SEED);
  const gains = serials.map(() => random.normal(1, 0.01));
  const build = async (shift: () => number) => {
    const rows = serials.map((serial, i) => {
      const gain = (gains[i] as number) + shift();
      return [serial, -231.9, 0.1246, -0.0139, 6.9e-6, gain.toFixed(9), -4.178e-4].join(",");
    });
    const bytes = Buffer.from(`serial,tempOffset,tempSlope,zero,zeroTc,gain,gainTc\n${rows.join("\n")}\n`);
    const { referenceC, capacityKg } = family;
    const { id } = await importCoefficients(people.engineer, { lot: code, referenceC, capacityKg, bytes });
    await approveDerivation(people, id);
    return (await buildGolden(people, { lot: code, layoutVersion: golden.layoutVersion })).id;
  };
  const from = await build(() => 0);
  return { from, to: await build(() => random.normal(0, 2e-6)) };
}

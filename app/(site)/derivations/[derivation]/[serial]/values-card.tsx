import { Card } from "@/app/_components/card";
import { Facts } from "@/app/_components/facts";
import { formatFigure } from "@/lib/domain/format/figure";
import { COEFFICIENT_QUANTITIES, formatQuantity, type QuantityName, quantities } from "@/lib/domain/format/quantity";
import type { DeviceEvidence } from "@/lib/services/derivations/get-device-evidence";
import type { DerivedDeviceDetail } from "@/schemas/api/derivations";

const MEANING: Partial<Record<QuantityName, string>> = {
  gainTc: "the correction",
  gainTc2: "the correction",
  zeroTc: "the drift",
  zeroTc2: "the drift",
};

/** A device's set with what is known of its certainty, and of what it can't say. */
export function ValuesCard({
  device,
  zeroCovariance,
}: {
  device: DerivedDeviceDetail;
  zeroCovariance: DeviceEvidence["zeroCovariance"];
}) {
  const { coefficients, uncertainty, individual } = device;
  if (!coefficients) return null;
  const errors: Partial<Record<QuantityName, number | null>> = uncertainty ?? {};
  return (
    <Card title="Coefficients" note="gainTc is the correction, zeroTc the drift">
      <Facts
        small
        facts={COEFFICIENT_QUANTITIES.filter((name) => coefficients[name] !== undefined).map((name) => ({
          label: `${name}${MEANING[name] ? `, ${MEANING[name]}` : ""}, ${quantities[name].unit}`,
          value: `${formatQuantity(name, coefficients[name])}${errors[name] ? ` ±${formatQuantity(name, errors[name])}` : ""}`,
        }))}
      />
      {individual && device.gainFrom !== null ? (
        <p className="mt-3 text-sm">
          Its own loaded readings alone ask for gainTc {formatQuantity("gainTc", individual.gainTc)} ppm/K and gain{" "}
          {formatQuantity("gain", individual.gain)}.
        </p>
      ) : null}
      {uncertainty ? (
        <ul className="mt-3 flex flex-col gap-1 text-sm">
          {certaintyOf(uncertainty).map((text) => (
            <li key={text}>{text}</li>
          ))}
          {zeroCovariance ? <li>{covarianceText(zeroCovariance)}</li> : null}
        </ul>
      ) : null}
    </Card>
  );
}

type Uncertainty = NonNullable<DerivedDeviceDetail["uncertainty"]>;

function certaintyOf(uncertainty: Uncertainty): string[] {
  const part = (what: string, freedom: number, sd: string | null) =>
    freedom > 0 && sd !== null
      ? `${what}: residuals of ${sd} with ${freedom} ${freedom === 1 ? "degree" : "degrees"} of freedom; ± is one standard error.`
      : `${what}: the fit passes through all points, so that no error can be stated.`;
  const { residualSdZero, residualSdTemperature, residualSdGain, degreesOfFreedomGain } = uncertainty;
  const gain = residualSdGain === null ? null : `${formatFigure(residualSdGain * 1e6, { digits: 1 })} ppm`;
  return [
    part(
      "Zero",
      uncertainty.degreesOfFreedomZero,
      residualSdZero === null ? null : `${formatQuantity("zero", residualSdZero)} µV/V`,
    ),
    part(
      "Thermometer",
      uncertainty.degreesOfFreedomTemperature,
      residualSdTemperature === null ? null : `${formatFigure(residualSdTemperature, { digits: 4 })} K`,
    ),
    ...(degreesOfFreedomGain > 0 ? [part("Gain", degreesOfFreedomGain, gain)] : []),
    ...(degreesOfFreedomGain === 0 && uncertainty.gainTc !== null
      ? ["gainTc: its ± is the standard error of the sample's mean, the same for every device."]
      : []),
  ];
}

function covarianceText({ covariance, correlation }: NonNullable<DeviceEvidence["zeroCovariance"]>): string {
  const strength = Math.abs(correlation) < 0.1 ? "hardly hang together" : "hang together";
  return (
    `zero and zeroTc come from one fit and ${strength}: correlation ${formatFigure(correlation, { digits: 3 })}, ` +
    `covariance ${formatFigure(covariance * 1e9, { digits: 4 })} µV/V · nV/V/K. Their errors must not be added as if they were independent.`
  );
}

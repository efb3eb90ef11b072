import type { PowerResult } from "../../app/protocol/index.ts";
import { formatNumber } from "../../app/report/index.ts";

const LARGEST = 4;

/** Which input the uncertainty of the volumes comes from: shares of the variance, largest first. */
export function Budget({ power }: { readonly power: PowerResult }) {
  if (power.budget.length === 0) return null;
  const shown = power.budget.slice(0, LARGEST);
  return (
    <section className="ledger-section budget" aria-label="Budget of the volumes">
      <h3>What the volumes' uncertainty comes from</h3>
      <ul>
        {shown.map(({ input, share }) => (
          <li key={input}>
            <span className="ledger-name">{input}</span>
            <svg className="budget-bar" aria-hidden="true" preserveAspectRatio="none" viewBox="0 0 100 8">
              <rect className="progress-ground" width="100" height="8" />
              <rect className="budget-share" width={100 * share} height="8" />
            </svg>
            <span className="budget-value">{Math.round(100 * share)} %</span>
          </li>
        ))}
      </ul>
    </section>
  );
}

const FROM_WORDS = {
  given: "given",
  preset: "preset",
  default: "default",
  fit: "fitted",
  "not determined": "not known",
} as const;

/** Every number that went in; a default is marked as one. */
export function Inputs({ power }: { readonly power: PowerResult }) {
  return (
    <section className="ledger-section inputs" aria-label="Inputs">
      <h3>Inputs</h3>
      <ul>
        {power.inputs.map(
          ({ name, key, value, unit, relative_sigma: sigma, from, sigma_from: sigmaFrom }) => {
            const assumed = from === "default" || from === "not determined";
            return (
              <li key={name + key} data-assumed={assumed || undefined} title={key}>
                <span className="ledger-name">{name}</span>
                <span className="inputs-value">
                  {value === null
                    ? "not known"
                    : `${formatNumber(value, 3)}${unit === "" ? "" : ` ${plainUnit(unit)}`}`}
                </span>
                <span className="small">
                  {assumed && (
                    <span className="note-mark" data-mark="assumption" aria-hidden="true">
                      ◇
                    </span>
                  )}
                  {FROM_WORDS[from]}
                </span>
                <span className="small inputs-sigma">
                  {sigma !== null &&
                    sigma > 0 &&
                    `${spreadWords(sigma)}${sigmaFrom === "default" ? " (default)" : ""}`}
                </span>
              </li>
            );
          },
        )}
      </ul>
    </section>
  );
}

/** Above this a relative error is a factor. */
const LARGE = 0.5;

function spreadWords(sigma: number): string {
  return sigma > LARGE
    ? `within a factor ${formatNumber(Math.exp(sigma), 2)}`
    : `±${formatNumber(100 * sigma, 2)} %`;
}

function plainUnit(unit: string): string {
  return unit
    .replace(/\bum\^3/g, "µm³")
    .replace(/\bum\^6/g, "µm⁶")
    .replace(/\bum\b/g, "µm")
    .replace(/\bueV/g, "µeV")
    .replace(/\buW\b/g, "µW");
}

import type { ReactNode } from "react";
import { resolveProtocol, type ProtocolInput } from "../../app/protocol/index.ts";
import type { Inspection } from "../../app/tasks/index.ts";
import { Clause, NumberAmount, Pick, Sentence } from "../controls/choices.tsx";
import { currentChoices, useController, useWindow } from "../store/context.ts";

type Signal = NonNullable<ProtocolInput["signal"]>;
type AxisChoices = NonNullable<ProtocolInput["axis"]>;

const AS_READ = "";

/** How the file is read: what was guessed is shown in its place and can be overruled. */
export function ReadChoices({
  inspection,
  after,
}: {
  readonly inspection: Inspection | null;
  readonly after?: ReactNode;
}) {
  const controller = useController();
  const resolved = resolveProtocol(useWindow(currentChoices));
  if (!resolved.ok) return null;
  const { axis, signal, table } = resolved.value;
  const spectrum = inspection?.spectrum ?? null;
  const headers = inspection?.headers ?? [];
  const taken = (role: string): string => {
    const found = spectrum?.columns.find((column) => column.role === role);
    return found === undefined ? "found by itself" : columnName(found.column, found.header);
  };
  const companion = (role: string): string =>
    spectrum?.columns.some((column) => column.role === role) === true ? taken(role) : "no column";
  const columns = headers.map((header, i) => ({ value: String(i + 1), text: columnName(i + 1, header) }));
  const columnValue = (column: number | string | null): string => {
    if (column === null) return AS_READ;
    if (typeof column === "number") return String(column);
    const at = headers.indexOf(column);
    return at < 0 ? AS_READ : String(at + 1);
  };
  const onAxis = (change: AxisChoices, step: string): void => controller.change({ axis: change }, step);
  const onSignal = (change: Signal, step: string): void => controller.change({ signal: change }, step);
  const pickColumn = (text: string): number | null => (text === AS_READ ? null : Number(text));
  return (
    <div className="choices">
      <Sentence label="How the file is read">
        {(inspection === null || table.delimiter !== null || table.decimal !== null) && (
          <>
            <Clause>
              Cells are parted by{" "}
              <Pick
                label="Delimiter"
                value={table.delimiter ?? AS_READ}
                options={[
                  { value: AS_READ, text: "what is found" },
                  ...(Object.entries(DELIMITERS) as [keyof typeof DELIMITERS, string][]).map(
                    ([value, text]) => ({ value, text }),
                  ),
                ]}
                onPick={(text) => {
                  const delimiter = text === AS_READ ? null : (text as keyof typeof DELIMITERS);
                  controller.change({ table: { delimiter } }, `delimiter ${delimiter ?? "found"}`);
                }}
              />
            </Clause>
            <Clause>
              with a decimal{" "}
              <Pick
                label="Decimal mark"
                value={table.decimal ?? AS_READ}
                options={[
                  { value: AS_READ, text: "mark that is found" },
                  { value: ".", text: "point" },
                  { value: ",", text: "comma" },
                ]}
                onPick={(text) => {
                  const decimal = text === AS_READ ? null : (text as "." | ",");
                  controller.change({ table: { decimal } }, `decimal mark ${decimal ?? "found"}`);
                }}
              />
              .
            </Clause>
          </>
        )}
        <Clause>
          The axis is{" "}
          <Pick
            label="Axis column"
            value={columnValue(axis.column)}
            options={[{ value: AS_READ, text: taken("axis") }, ...columns]}
            onPick={(text) => onAxis({ column: pickColumn(text) }, `axis column ${text || "found"}`)}
          />
        </Clause>
        <Clause>
          in{" "}
          <Pick
            label="Unit of the axis"
            value={axis.unit ?? AS_READ}
            options={[
              {
                value: AS_READ,
                text: spectrum === null ? "its own unit" : AXIS_UNITS[spectrum.axisUnitRead],
              },
              ...(Object.entries(AXIS_UNITS) as [keyof typeof AXIS_UNITS, string][]).map(([value, text]) => ({
                value,
                text,
              })),
            ]}
            onPick={(unit) =>
              onAxis(
                { unit: unit === AS_READ ? null : (unit as keyof typeof AXIS_UNITS) },
                `axis unit ${unit || "as read"}`,
              )
            }
          />
        </Clause>
        <Clause>
          measured in{" "}
          <Pick
            label="Medium of the light axis"
            value={axis.medium ?? AS_READ}
            options={[
              { value: AS_READ, text: spectrum === null ? "air or vacuum" : spectrum.medium },
              { value: "air", text: "air" },
              { value: "vacuum", text: "vacuum" },
            ]}
            onPick={(medium) =>
              onAxis(
                { medium: medium === AS_READ ? null : (medium as "air" | "vacuum") },
                `axis in ${medium || "medium as read"}`,
              )
            }
          />
          ;
        </Clause>
        <Clause>
          the signal is{" "}
          <Pick
            label="Signal column"
            value={columnValue(signal.column)}
            options={[{ value: AS_READ, text: taken("signal") }, ...columns]}
            onPick={(text) => onSignal({ column: pickColumn(text) }, `signal column ${text || "found"}`)}
          />
        </Clause>
        <Clause>
          as{" "}
          <Pick
            label="Signal quantity"
            value={signal.quantity ?? AS_READ}
            options={[
              {
                value: AS_READ,
                text: spectrum === null ? "what it says" : QUANTITIES[spectrum.quantityRead],
              },
              ...(Object.entries(QUANTITIES) as [keyof typeof QUANTITIES, string][]).map(([value, text]) => ({
                value,
                text,
              })),
            ]}
            onPick={(quantity) =>
              onSignal(
                { quantity: quantity === AS_READ ? null : (quantity as keyof typeof QUANTITIES) },
                `signal as ${quantity || "read"}`,
              )
            }
          />
        </Clause>
        {headers.length > 2 && (
          <Clause>
            with deviations from{" "}
            <Pick
              label="Column of the standard deviation"
              value={columnValue(signal.sigma_column)}
              options={[{ value: AS_READ, text: companion("sigma") }, ...columns]}
              onPick={(text) => onSignal({ sigma_column: pickColumn(text) }, `deviations ${text || "found"}`)}
            />
          </Clause>
        )}
        {(signal.quantity === "counts" ||
          signal.reference_column !== null ||
          signal.dark_column !== null ||
          spectrum?.columns.some(({ role }) => role === "reference" || role === "dark") === true) && (
          <Clause>
            over the reference{" "}
            <Pick
              label="Column of the reference"
              value={columnValue(signal.reference_column)}
              options={[{ value: AS_READ, text: companion("reference") }, ...columns]}
              onPick={(text) =>
                onSignal({ reference_column: pickColumn(text) }, `reference ${text || "found"}`)
              }
            />{" "}
            less the dark{" "}
            <Pick
              label="Column of the dark counts"
              value={columnValue(signal.dark_column)}
              options={[{ value: AS_READ, text: companion("dark") }, ...columns]}
              onPick={(text) => onSignal({ dark_column: pickColumn(text) }, `dark ${text || "found"}`)}
            />
          </Clause>
        )}
        <Clause>
          of a crystal{" "}
          <NumberAmount
            label="Thickness in micrometres"
            value={signal.thickness_um}
            placeholder={thicknessRead(inspection)}
            width={4}
            accept={(value) => value > 0}
            expected="a thickness in µm above zero"
            onTake={(value) =>
              onSignal(
                { thickness_um: value },
                value === null ? "thickness as read" : `thickness ${value} µm`,
              )
            }
          />{" "}
          µm thick,
        </Clause>
        <Clause>
          surfaces{" "}
          <Pick
            label="Surface correction"
            value={signal.surface.model}
            options={[
              { value: "none", text: "not corrected" },
              { value: "single", text: "corrected, single pass" },
              { value: "all", text: "corrected, all reflections" },
            ]}
            onPick={(model) => onSignal({ surface: { model } }, `surfaces ${model}`)}
          />
        </Clause>
        {signal.surface.model !== "none" && (
          <Clause>
            with R ={" "}
            <NumberAmount
              label="Reflectance of one surface, or empty to take it from the index"
              value={signal.surface.reflectance}
              placeholder="from index"
              width={8}
              accept={(value) => value >= 0 && value < 1}
              expected="0 to 1"
              onTake={(value) =>
                onSignal({ surface: { reflectance: value } }, `reflectance ${value ?? "from index"}`)
              }
            />
          </Clause>
        )}
      </Sentence>
      {after}
    </div>
  );
}

/** The thickness that the header gave, as written there. */
function thicknessRead(inspection: Inspection | null): string {
  const fact = inspection?.spectrum.facts.find(({ key }) => key === "thickness");
  if (fact === undefined) return "unknown";
  return fact.value !== null && (fact.unit === "um" || fact.unit === "µm") ? String(fact.value) : fact.text;
}

const DELIMITERS = { ",": "commas", ";": "semicolons", "\t": "tabs", " ": "spaces" } as const;

export function columnName(column: number, header: string): string {
  return header === "" ? `column ${column}` : header;
}

const AXIS_UNITS = {
  eV: "eV",
  meV: "meV",
  nm: "nm",
  Angstrom: "Å",
  um: "µm",
  "cm-1": "cm⁻¹",
  THz: "THz",
} as const;
const QUANTITIES = {
  transmittance: "transmittance",
  absorbance: "absorbance (decadic)",
  "optical-density": "optical density (decadic)",
  "optical-depth": "optical depth (natural)",
  alpha: "absorption coefficient",
  counts: "detector counts",
} as const;

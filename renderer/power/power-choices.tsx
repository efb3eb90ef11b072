import { resolveProtocol, type ProtocolInput } from "../../app/protocol/index.ts";
import { Amount, Clause, NumberAmount, Pick, Sentence } from "../controls/choices.tsx";
import { FitButton } from "../controls/fit-button.tsx";
import { currentChoices, currentPower, useController, useWindow } from "../store/context.ts";
import { parsePowers } from "./parse-powers.ts";

type PowerChoice = NonNullable<ProtocolInput["power"]>;

const UNSAID = "";

/** How the series was taken and what is known of it; what is not said stands as its default, marked as one. */
export function PowerChoices() {
  const controller = useController();
  const choices = useWindow(currentChoices);
  const inputs = useWindow(currentPower)?.analysed.result.power?.inputs ?? [];
  const resolved = resolveProtocol(choices);
  if (!resolved.ok) return null;
  const { power, signal } = resolved.value;
  const set = (change: PowerChoice, step: string): void => controller.change({ power: change }, step);
  const gaussian = power.spot_profile === "gaussian";
  const was = (key: string): string | null => {
    const found = inputs.find((one) => one.key === key)?.value ?? null;
    return found === null ? null : String(Number(found.toPrecision(3)));
  };
  const dipole = power.interaction === "dipole-dipole";
  const coefficient = dipole ? power.c3_ueV_um3 : power.c6_ueV_um6;
  return (
    <div className="choices">
      <Sentence label="How the power series was taken">
        <Clause>
          Powers{" "}
          <Amount
            label="Powers in µW in the order of the spectra, or empty to read them from headers and names"
            value={power.values_uW === null ? "" : power.values_uW.join(", ")}
            placeholder="as the headings say"
            width={14}
            onCommit={(text) => {
              const values = parsePowers(text);
              if (values === null) return "two powers in µW at least, such as 1, 2, 5";
              const typed = values === "read" ? null : values;
              set(
                { values_uW: typed === null ? null : [...typed] },
                typed === null ? "powers as read" : `powers ${text} µW`,
              );
              return null;
            }}
          />{" "}
          µW,
        </Clause>
        <Clause>
          light from{" "}
          <Pick
            label="How the series was taken"
            value={power.excitation ?? UNSAID}
            options={[
              { value: UNSAID, text: "a separate pump (default)" },
              { value: "separate-pump", text: "a separate pump" },
              { value: "scanned-probe", text: "the scanned laser itself" },
              { value: "broadband", text: "a broad band" },
            ]}
            onPick={(text) =>
              set(
                { excitation: text === UNSAID ? null : (text as NonNullable<PowerChoice["excitation"]>) },
                `light from ${text || "as by default"}`,
              )
            }
          />
        </Clause>
        <Clause>
          on a{" "}
          <Pick
            label="Beam profile"
            value={power.spot_profile ?? UNSAID}
            options={[
              { value: UNSAID, text: "flat (default)" },
              { value: "flat", text: "flat" },
              { value: "gaussian", text: "Gaussian" },
            ]}
            onPick={(text) =>
              set(
                {
                  spot_profile: text === UNSAID ? null : (text as "flat" | "gaussian"),
                  spot_definition: null,
                },
                `beam ${text || "as by default"}`,
              )
            }
          />{" "}
          spot of{" "}
          <Positive
            label="Spot diameter in micrometres"
            value={power.spot_diameter_um}
            placeholder="unknown"
            unit="µm"
            onTake={(value) => set({ spot_diameter_um: value }, `spot ${value ?? "unknown"} µm`)}
          />{" "}
          µm
          {gaussian && (
            <>
              {" "}
              <Pick
                label="What the spot diameter means"
                value={power.spot_definition ?? UNSAID}
                options={[
                  { value: UNSAID, text: "at 1/e² (default)" },
                  { value: "1/e2", text: "at 1/e²" },
                  { value: "fwhm", text: "at half maximum" },
                ]}
                onPick={(text) =>
                  set(
                    { spot_definition: text === UNSAID ? null : (text as "1/e2" | "fwhm") },
                    `spot ${text || "as by default"}`,
                  )
                }
              />
            </>
          )}
          ,
        </Clause>
        <Clause>
          <Share
            label="Part of the stated power that reaches the crystal"
            value={power.transmission_to_sample}
            placeholder="1 (default)"
            onTake={(value) =>
              set({ transmission_to_sample: value }, `part on the sample ${value ?? "default"}`)
            }
          />{" "}
          of it on the crystal,
        </Clause>
        <Clause>
          <Positive
            label="Thickness in micrometres"
            value={signal.thickness_um}
            placeholder={was("signal.thickness_um") ?? "as the header says"}
            unit="µm"
            onTake={(value) =>
              controller.change({ signal: { thickness_um: value } }, `thickness ${value ?? "as read"}`)
            }
          />{" "}
          µm thick,
        </Clause>
        <Clause>
          R ={" "}
          <Share
            label="Reflectance of one surface"
            value={signal.surface.reflectance}
            placeholder={was("signal.surface.reflectance") ?? "from index"}
            onTake={(value) =>
              controller.change(
                { signal: { surface: { reflectance: value } } },
                `reflectance ${value ?? "from index"}`,
              )
            }
          />
          ;
        </Clause>
        <Clause>
          pairs repel as{" "}
          <Pick
            label="Interaction"
            value={power.interaction}
            options={[
              { value: "dipole-dipole", text: "dipoles, C₃" },
              { value: "van-der-waals", text: "van der Waals, C₆" },
            ]}
            onPick={(interaction) => set({ interaction }, `interaction ${interaction}`)}
          />{" "}
          ={" "}
          <Positive
            label={dipole ? "C3 over n to the 4 in µeV µm³" : "C6 over n to the 11 in µeV µm⁶"}
            value={coefficient}
            placeholder={dipole ? "2.37e-4 (default)" : "unknown"}
            unit=""
            onTake={(value) =>
              set(dipole ? { c3_ueV_um3: value } : { c6_ueV_um6: value }, `coefficient ${value ?? "default"}`)
            }
          />{" "}
          {dipole ? "n⁴ µeV µm³" : "n¹¹ µeV µm⁶"},
        </Clause>
        <Clause>
          living{" "}
          <Positive
            label="Lifetime in picoseconds for all lines, or empty to take it from the widths"
            value={typeof power.lifetime_ps === "number" ? power.lifetime_ps : null}
            placeholder={Array.isArray(power.lifetime_ps) ? "as listed" : "ħ/Γ (default)"}
            unit="ps"
            onTake={(value) => set({ lifetime_ps: value }, `lifetime ${value ?? "from widths"}`)}
          />{" "}
          ps;
        </Clause>
        <Clause>
          <Pick
            label="What each spectrum has for itself"
            value={power.free.gap ? "gap" : "shared"}
            options={[
              { value: "shared", text: "one gap for all powers" },
              { value: "gap", text: "a gap for each power" },
            ]}
            onPick={(text) =>
              set({ free: { gap: text === "gap" } }, `${text === "gap" ? "a gap each" : "one gap"}`)
            }
          />
        </Clause>
      </Sentence>
      <FitButton what="power" />
    </div>
  );
}

interface FieldProps {
  readonly label: string;
  readonly value: number | null;
  readonly placeholder: string;
  readonly onTake: (value: number | null) => void;
}

function Positive({ unit, ...field }: FieldProps & { readonly unit: string }) {
  const expected = `a number above zero${unit === "" ? "" : `, in ${unit}`}`;
  return <NumberAmount {...field} accept={(value) => value > 0} expected={expected} />;
}

function Share(field: FieldProps) {
  return (
    <NumberAmount
      {...field}
      accept={(value) => value > 0 && value < 1.0000001}
      expected="above 0, at most 1"
    />
  );
}

import type { Quantity } from "../../app/base/index.ts";
import type { PowerResult } from "../../app/protocol/index.ts";
import { useMode } from "../frame/theme.ts";
import { formatNumber } from "../../app/report/index.ts";
import { rowByKey } from "../controls/row-by-key.ts";
import { valueText } from "../ledger/value-text.ts";
import { colourOfN } from "../plot/colours.ts";
import { useController, useWindow } from "../store/context.ts";

const shown = (quantity: Quantity, scale = 1): string => valueText({ quantity, scale, unit: "" }).value;

/** From a given Bohr radius an orbit has no error of its own: four digits are enough, and alike in every row. */
function orbitText(radius: Quantity): string {
  const exact = radius.value !== null && (radius.sigma === null || radius.sigma === 0);
  return exact ? formatNumber(radius.value! * 1e3, 4) : shown(radius, 1e3);
}

/** What each n of this crystal is good for. */
export function CrystalTable({ crystal }: { readonly crystal: PowerResult["crystal"] }) {
  const controller = useController();
  const pointed = useWindow((state) => state.pointedN);
  const selected = useWindow((state) => state.selectedN);
  const mode = useMode();
  const numbers = crystal.map(({ n }) => n);
  return (
    <div className="crystal" tabIndex={0} role="group" aria-label="What this crystal is good for">
      <table
        className="lines-table crystal-table"
        role="grid"
        tabIndex={0}
        aria-activedescendant={selected === null ? undefined : `crystal-row-${selected}`}
        onKeyDown={(event) => {
          if (event.target !== event.currentTarget) return;
          const at = selected === null ? -1 : numbers.indexOf(selected);
          const next = rowByKey(event.key, at, numbers.length);
          if (next === undefined) return;
          event.preventDefault();
          controller.select(numbers[next] ?? null);
        }}
      >
        <caption className="hidden">What each n is good for; arrow keys choose a line</caption>
        <thead>
          <tr>
            <th scope="col">n</th>
            <th scope="col">alone?</th>
            <th scope="col">spacing / µeV</th>
            <th scope="col">width / µeV</th>
            <th scope="col">spacing/width</th>
            <th scope="col">lifetime / ps</th>
            <th scope="col">orbit / nm</th>
            <th scope="col">blockade / µm</th>
            <th scope="col">spot of one / µm</th>
          </tr>
        </thead>
        <tbody>
          {crystal.map((one) => (
            <tr
              key={one.n}
              id={`crystal-row-${one.n}`}
              data-n={one.n}
              aria-selected={selected === one.n}
              data-lit={pointed === one.n || undefined}
              data-chosen={selected === one.n || undefined}
              onPointerEnter={() => controller.point(one.n)}
              onPointerLeave={() => controller.point(null)}
              onClick={() => controller.select(selected === one.n ? null : one.n)}
            >
              <th scope="row">
                <span className="line-name">
                  <svg width="10" height="10" aria-hidden="true">
                    <rect x="1" y="1" width="8" height="8" rx="1" fill={colourOfN(one.n, mode)} />
                  </svg>
                  {one.n}
                </span>
              </th>
              <td>{one.addressable === null ? "not determined" : one.addressable ? "yes" : "no"}</td>
              <td>{shown(one.spacing_eV, 1e6)}</td>
              <td>{shown(one.width_eV, 1e6)}</td>
              <td>{shown(one.addressability)}</td>
              <td>{shown(one.lifetime_ps)}</td>
              <td>{orbitText(one.orbit_radius_um)}</td>
              <td>
                {shown(one.blockade_radius_um)}
                {one.blockade_from === "expected" && " expected"}
              </td>
              <td>{shown(one.single_spot_um)}</td>
            </tr>
          ))}
        </tbody>
      </table>
    </div>
  );
}

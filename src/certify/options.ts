import { GoodBasisError } from "../errors.js";

/**
 * Refuses options that are no object or have a name that is not known, which would be passed over in silence.
 *
 * @throws GoodBasisError `option`
 */
export function requireOptions(verb: string, options: unknown, known?: readonly string[]): void {
  if (typeof options === "object" && options !== null) {
    const unknown = Object.keys(options).find((name) => known?.includes(name) === false);
    if (unknown === undefined) return;
    throw new GoodBasisError(
      "option",
      `${verb}: there is no option "${unknown}"; the options are ${known?.join(", ")}`,
      {
        option: unknown,
      },
    );
  }
  throw new GoodBasisError(
    "option",
    `${verb}: options is ${String(options)}; give an object such as {}, or leave it out`,
    {
      options,
    },
  );
}

/**
 * Refuses a level width that is no energy.
 *
 * @throws GoodBasisError `option`
 */
export function checkLevelWidth(levelWidth: unknown): void {
  if (levelWidth === undefined || (typeof levelWidth === "number" && levelWidth >= 0 && Number.isFinite(levelWidth)))
    return;
  throw new GoodBasisError("option", `levelWidth is ${String(levelWidth)}; give an energy that is not negative`, {
    levelWidth,
  });
}

import { GoodBasisError } from "../errors.js";

/**
 * Refuses options that are no object.
 *
 * @throws GoodBasisError `option`
 */
export function requireOptions(verb: string, options: unknown): void {
  if (typeof options === "object" && options !== null) return;
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

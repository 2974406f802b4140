import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";

export { requireOptions } from "../misuse.js";

/**
 * Refuses a level width that is no energy.
 *
 * @throws GoodBasisError `option`
 */
export function checkLevelWidth(levelWidth: unknown): void {
  if (levelWidth === undefined || (typeof levelWidth === "number" && levelWidth >= 0 && Number.isFinite(levelWidth)))
    return;
  throw new GoodBasisError("option", `levelWidth is ${shown(levelWidth)}; give an energy that is not negative`, {
    levelWidth,
  });
}

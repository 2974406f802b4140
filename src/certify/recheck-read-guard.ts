import type { CertifiedLevel } from "./certificate-format.js";
import type { Reader } from "./recheck-reader.js";

type Guard = CertifiedLevel["guard"];
type SectorGuard = Guard["sectors"][number];
type Finding = SectorGuard["first"];

/** Reads the denominators guard of a level. */
export function readGuard(item: Reader): Guard {
  item.only(["lambda", "stated", "refuseAbove", "sectors", "outside", "inside", "radius"]);
  return {
    lambda: item.field("lambda").number(),
    stated: item.field("stated").boolean(),
    refuseAbove: item.field("refuseAbove").number(),
    sectors: item.field("sectors").list(readSector),
    outside: item.field("outside").bound(),
    inside: item.field("inside").bound(),
    radius: item.field("radius").list((x) => x.orNull((y) => y.bound())),
  };
}

function readSector(item: Reader): SectorGuard {
  item.only(["perturbation", "sector", "first", "second", "inside"]);
  return {
    perturbation: item.field("perturbation").text(),
    sector: item.field("sector").count(0),
    first: readFinding(item.field("first")),
    second: readFinding(item.field("second")),
    inside: item.field("inside").orNull(readFinding),
  };
}

function readFinding(item: Reader): Finding {
  item.only(["ratio", "energy"]);
  return {
    ratio: item.field("ratio").bound(),
    energy: item.field("energy").orNull((x) => x.number()),
  };
}

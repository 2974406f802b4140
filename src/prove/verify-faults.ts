/** Something in a proof that was not confirmed. */
export interface ProofFault {
  /** Where: "leaf 3, label Jz", "level 0", "[Jz, V]". */
  readonly place: string;
  /** What is wrong there. */
  readonly message: string;
}

/** Collects faults. */
export class Faults {
  readonly list: ProofFault[] = [];

  /** Notes a fault unless something holds; says whether it does. */
  unless(holds: boolean, place: string, message: string): boolean {
    if (!holds) this.list.push({ place, message });
    return holds;
  }
}

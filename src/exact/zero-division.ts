import { GoodBasisError } from "../errors.js";

/**
 * The error of a division by zero.
 *
 * @param where - the function that divides
 * @param dividend - what is divided, as text
 */
export function zeroDivision(where: string, dividend: string): GoodBasisError {
  return new GoodBasisError("zero-division", `${where}: ${dividend} is divided by zero; test with isZero first`);
}

/**
 * A component counts as one of the largest when its modulus is at least this many thousandths of the largest: the first such
 * component is made real and positive. Away from the ratios of small square roots, so that rounding does not choose.
 */
export const LARGE_COMPONENT_THOUSANDTHS = 987;

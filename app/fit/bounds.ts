/** Largest |q|; far beyond what any published exciton line shows. */
export const ASYMMETRY_BOUND = 5;
/** The tied lines may fall short of the strength law, and exceed it a little. */
export const FACTOR_BOUND = 1.2;
/** A fit may change a width by this factor from its start. */
export const WIDTH_BOUND_FACTOR = 8;

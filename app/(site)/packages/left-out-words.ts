/** Why a device is left out of a package, in words for a list. */
export const leftOutWords: Record<string, string> = {
  scrapped: "scrapped",
  held: "held",
  excluded: "excluded from the derivation",
  "no-coefficients": "without coefficients",
  undecided: "coefficients still to be decided",
  refused: "coefficients refused",
  stale: "coefficients stale",
  revoked: "coefficients revoked",
  "other-order": "coefficients of another order than the layout's",
  "other-revision": "coefficients of another family revision than the lot's",
};

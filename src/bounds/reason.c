#include "bounds/bounds.h"

static const char *const NAMES[] = {[TML_REASON_RESTRAINT] = "restraint", [TML_REASON_BOND] = "bond",
                                    [TML_REASON_ANGLE] = "angle",         [TML_REASON_TORSION] = "torsion",
                                    [TML_REASON_PLANE] = "plane",         [TML_REASON_CHIRALITY] = "chirality",
                                    [TML_REASON_RADIUS] = "radius",       [TML_REASON_DIHEDRAL] = "dihedral"};

const char *tml_reason_name(tml_reason reason) {
    return NAMES[reason];
}

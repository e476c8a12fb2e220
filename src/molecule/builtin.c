#include <string.h>

#include "molecule/residue_data.h"

const tml_template *tml_builtin(int32_t index) {
    const tml_template *const tables[] = {tml_amino_acids, tml_nucleotides};
    for (size_t t = 0; t < sizeof tables / sizeof *tables; t++)
        for (const tml_template *form = tables[t]; form->name != NULL; form++)
            if (index-- == 0) return form;
    return NULL;
}

const tml_template *tml_find_builtin(const char *name) {
    const tml_template *form;
    for (int32_t i = 0; (form = tml_builtin(i)) != NULL; i++)
        if (strcmp(form->name, name) == 0) return form;
    return NULL;
}

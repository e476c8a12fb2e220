#!/bin/sh
# Small jobs on invented data: an ensemble of a protein of 52 residues, a table beside it, a slip in the restraints of a hairpin, a ring of beads.
set -eu
program=${BUILD:-build}/trammel
out=$(mktemp -d)
trap 'rm -rf "$out"' EXIT

show() {
    printf '\n$ trammel %s\n' "$*"
    status=0
    "$program" "$@" || status=$?
    [ "$status" -le 1 ] || exit "$status"
    [ "$status" -eq 0 ] || echo "(exit status $status: a finding)"
}

show build restraints/veilin.nef -o "$out/veilin.pdb" --summary "$out/veilin.json"
show check restraints/veilin.nef --table restraints/veilin-labels.csv --table-form 'nm decimal-comma' \
    --columns 'residue_1@first residue_2@second target@distance error@error chain=A atom_1=CB atom_2=CB'
show check restraints/hairpin.sheet
show check restraints/hairpin.sheet restraints/hairpin-slip.sheet
show build restraints/crosslinks.sheet -n 5 -o "$out/crosslinks.cif"
printf '\nThe demo wrote to a scratch folder that is gone now; give -o a name of your own to keep models.\n'

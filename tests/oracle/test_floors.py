"""Hard floors against deposited NMR ensembles (PDB entries 2SDF and 1ADZ, open data): no pair of atoms more than three bonds apart
comes nearer in any model; and they are no mere zeros, since some pair comes within half an ångström of its floor."""
import gzip
import os
import subprocess
import sys
import tempfile

import gemmi
import numpy

DUMP = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'oracle', 'dump_floors')
FOLDER = '/usr/share/doc/theseus/examples'
PLANAR = {'PHE', 'TYR', 'TRP', 'HIS'}  # atoms across a ring are held by its plane, four bonds apart or not


def floors_of(residues):
    words = [r.name for r in residues]
    variants = [f'variant A {i} -HG' for i, r in enumerate(residues, 1) if r.name == 'CYS' and 'HG' not in {a.name for a in r}]
    with tempfile.NamedTemporaryFile('w', suffix='.sheet') as file:
        file.write('\n'.join(['sheet 1', f'sequence A 1 {" ".join(words)}', *variants]) + '\n')
        file.flush()
        lines = subprocess.run([DUMP, file.name], check=True, capture_output=True, text=True).stdout.splitlines()
    count = len(lines) // 2
    names = [(int(number), name) for number, name in map(str.split, lines[:count])]
    floors = numpy.array([[numpy.nan if word == '-' else float(word) for word in line.split()] for line in lines[count:]])
    for i, (one, _) in enumerate(names):
        for j, (other, _) in enumerate(names):
            if one == other and words[one - 1] in PLANAR:
                floors[i, j] = numpy.nan
    return names, floors


def main():
    if not os.path.isdir(FOLDER):
        print('no deposited ensembles on this machine')
        return 77
    passed = failed = 0
    for entry in ('2sdf', '1adz'):
        with gzip.open(f'{FOLDER}/{entry}.pdb.gz', 'rt') as file:
            structure = gemmi.read_pdb_string(file.read())
        names, floors = floors_of(list(structure[0][0]))
        least = numpy.inf
        for number, model in enumerate(structure, 1):
            places = {(i, a.name): a.pos.tolist() for i, r in enumerate(model[0], 1) for a in r}
            xyz = numpy.array([places.get(name, [numpy.nan] * 3) for name in names])
            room = numpy.linalg.norm(xyz[:, None] - xyz[None, :], axis=2) - floors
            below = [(names[i], names[j], round(float(room[i, j]), 3)) for i, j in zip(*numpy.where(room < 0)) if i < j]
            least = min(least, numpy.nanmin(room))
            passed, failed = passed + (not below), failed + bool(below)
            if below:
                print(f'{entry}, model {number}: below the floor', *below[:10], sep='\n    ')
        if not least < 0.5:
            failed += 1
            print(f'{entry}: no pair comes within {least} Å of its floor')
        print(f'{entry}: {len(structure)} models, {len(names)} atoms, least room {least:.3f} Å')
    print(f'{passed} passed, {failed} failed')
    return failed != 0


if __name__ == '__main__':
    sys.exit(main())

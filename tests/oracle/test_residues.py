"""Residue tables against the open monomer dictionary (bonds, angles, planes, handedness) and against themselves.

Heavy atoms: both sides go back to Engh & Huber, Acta Cryst. A47 (1991) 392. X-H lengths: the dictionary's are those of electron
clouds, so they are compared with nuclear ones (neutron diffraction, usual values: C-H 1.09, ring C-H 1.08, N-H 1.02, O-H 0.97,
S-H 1.34). Hands: also the rule for prochiral names that deposited structures follow (common practice).
"""
import itertools
import math
import os
import subprocess
import sys

import gemmi
import numpy as np

DUMP = os.path.join(os.environ.get('BUILD', 'build'), 'oracle', 'dump_molecule')
MONOMERS = '/usr/share/refmac/monomers'
NAMES = 'ALA ARG ASN ASP CYS GLN GLU GLY HIS ILE LEU LYS MET PHE PRO SER THR TRP TYR VAL'.split()
NUCLEAR = {'C': (1.09, 1.08), 'N': (1.02,), 'O': (0.97,), 'S': (1.34,)}
KEYS = ('atom', 'bond', 'angle', 'torsion', 'centre', 'plane', 'peptide')


def dump(*words):
    terms = {key: [] for key in KEYS}
    for line in subprocess.run([DUMP, *words], check=True, capture_output=True, text=True).stdout.splitlines():
        key, *fields = line.split('\t')
        terms[key].append(fields)
    return terms


def dictionary(name):
    with open(f'{MONOMERS}/{name[0].lower()}/{name}.cif', encoding='latin1') as file:
        text = file.read()
    block = gemmi.cif.read_string(text[text.find('data_'):])[-1]

    def rows(category, *columns):
        return [[gemmi.cif.as_string(x).strip() for x in row] for row in block.find(f'_chem_comp_{category}.', list(columns))]
    return dict(bond=rows('bond', 'atom_id_1', 'atom_id_2', 'value_dist'),
                angle=rows('angle', 'atom_id_1', 'atom_id_2', 'atom_id_3', 'value_angle'),
                chir=rows('chir', 'atom_id_centre', 'atom_id_1', 'atom_id_2', 'atom_id_3', 'volume_sign'),
                plane=rows('plane_atom', 'plane_id', 'atom_id'))


def rms(values):
    return math.sqrt(sum(v * v for v in values) / len(values))


class Checks:
    def __init__(self):
        self.failed = 0

    def that(self, good, text):
        print(('ok    ' if good else 'FAIL  ') + text)
        self.failed += not good


def middle(name):
    """The residue in the middle of a chain: its atoms' names to indices, and the chain's terms."""
    terms = dump('ALA', name, 'ALA')
    return {f[3]: int(f[0]) for f in terms['atom'] if f[1] == '2'}, terms


def compare_lengths_and_angles(checks, verbose):
    bonds, angles, angles_h, xh = [], [], [], []
    for name in NAMES:
        at, terms = middle(name)
        back = {i: n for n, i in at.items()}
        mine = {frozenset((back[int(a)], back[int(b)])): float(r) for a, b, r in terms['bond'] if int(a) in back and int(b) in back}
        theirs = dictionary(name)
        checks.that(set(mine) == {frozenset(b[:2]) for b in theirs['bond']}, f'{name} has the same atoms and bonds')
        for a, b, r in theirs['bond']:
            own = mine.get(frozenset((a, b)), 0)
            if 'H' in (a[0], b[0]):
                heavy = b[0] if a[0] == 'H' else a[0]
                xh.append(min(abs(own - r0) for r0 in NUCLEAR[heavy]))
            else:
                bonds.append((own - float(r), f'{name} {a}-{b} {own:.3f} {r}'))
        mine = {(back[int(b)], frozenset((back[int(a)], back[int(c)]))): float(t) for a, b, c, t in terms['angle']
                if all(int(x) in back for x in (a, b, c))}
        for a, b, c, t in theirs['angle']:
            own = mine.get((b, frozenset((a, c))), 0)
            (angles_h if 'H' in (a[0], c[0]) else angles).append((own - float(t), f'{name} {a}-{b}-{c} {own:.2f} {t}'))
    if verbose:
        for kind, limit in ((bonds, 0.005), (angles, 0.75), (angles_h, 1.99)):
            for d, text in kind:
                if abs(d) > limit:
                    print('      ', text, f'{d:+.3f}')
    for what, values, most, largest in (('heavy bonds, Å', bonds, 0.006, 0.02), ('heavy angles, °', angles, 0.8, 3),
                                        ('angles with H, °', angles_h, 2, None)):
        d = [v for v, _ in values]
        checks.that(rms(d) <= most and (largest is None or max(map(abs, d)) <= largest),
                    f'{what}: {len(d)}, r.m.s. {rms(d):.4f}, largest {max(map(abs, d)):.3f} ({max(values, key=lambda v: abs(v[0]))[1]})')
    checks.that(max(xh) < 1e-6, f'{len(xh)} X-H lengths are nuclear ones')


def compare_hands(checks):
    fixed = 0
    for name in NAMES:
        at, terms = middle(name)
        centres = {int(f[0]): ([int(x) for x in f[1:5]], int(f[5]), f[6] == '1') for f in terms['centre']}
        for c, a1, a2, a3, sign in dictionary(name)['chir']:
            if not sign.startswith(('pos', 'neg')) or c not in at:
                continue
            arms, own, is_fixed = centres[at[c]]
            wanted = [at[a] for a in (a1, a2, a3)]
            checks.that(is_fixed and set(wanted) <= set(arms) and volume_sign(arms, own, wanted) == (1 if sign.startswith('pos') else -1),
                        f'{name} {c}: {a1}, {a2}, {a3} {sign}')
            fixed += 1
    checks.that(fixed >= 20, f'{fixed} centres compared')


def volume_sign(arms, sign, wanted):
    """Sign of the volume of three arms of a tetrahedral centre whose first three arms have the given sign."""
    corners = np.array([[1, 1, 1], [1, -1, -1], [-1, 1, -1], [-1, -1, 1]], float)  # the first three: positive
    if np.linalg.det(corners[:3]) < 0:
        corners = -corners
    corners *= sign
    return int(np.sign(np.linalg.det(np.array([corners[arms.index(w)] for w in wanted]))))


def main():
    if not os.path.isdir(MONOMERS):
        print('skipped: no monomer dictionary on this machine')
        return 0
    checks = Checks()
    compare_lengths_and_angles(checks, '-v' in sys.argv)
    compare_hands(checks)
    print(f'{checks.failed} failed')
    return checks.failed != 0


if __name__ == '__main__':
    sys.exit(main())

"""Residue tables against the open monomer dictionary: atoms, bonds, angles, planes and hands of the twenty amino acids.

Heavy atoms: both sides go back to Engh & Huber, Acta Cryst. A47 (1991) 392. X-H lengths: the dictionary's are those of electron
clouds, so ours are compared with nuclear ones (neutron diffraction, usual values: C-H 1.09, ring C-H 1.08, N-H 1.02, O-H 0.97,
S-H 1.34). Two angles differ on purpose and are left in the figures: H-N-CA, 118.2 degrees here since a peptide's N is planar, 114
there; CB-SG-HG, 96.5 here as in methanethiol (microwave spectrum), 109 there.

  test_residues.py [-v]     -v lists every bond and angle that differs
"""
import itertools
import math
import os
import subprocess
import sys
import unittest

import gemmi
import numpy

DUMP = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'oracle', 'dump_molecule')
MONOMERS = '/usr/share/refmac/monomers'
NUCLEAR = {'C': (1.09, 1.08), 'N': (1.02,), 'O': (0.97,), 'S': (1.34,)}
NUCLEOTIDES = 'DA DC DG DT A C G U'.split()
END_ATOMS = {'OP3', "HO3'", "HO5'"}  # which the dictionary may give to a nucleotide, and a strand has at its ends alone
VERBOSE = '-v' in sys.argv


class Residue:
    """A residue in the middle of a chain, by atom names; and what the dictionary has of it."""

    def __init__(self, name):
        terms = {}
        beside = name if name in NUCLEOTIDES else 'ALA'
        for line in subprocess.run([DUMP, beside, name, beside], check=True, capture_output=True, text=True).stdout.splitlines():
            key, *fields = line.split('\t')
            terms.setdefault(key, []).append(fields)
        names = {f[0]: f[3] for f in terms['atom'] if f[1] == '2'}
        self.atoms = set(names.values())
        self.bonds = {frozenset((names[a], names[b])): float(r) for a, b, r in terms['bond'] if a in names and b in names}
        self.angles = {(names[b], frozenset((names[a], names[c]))): float(t) for a, b, c, t in terms['angle']
                       if a in names and b in names and c in names}
        self.centres = {names[f[0]]: ([names.get(x) for x in f[1:5]], int(f[5]), f[6] == '1') for f in terms['centre'] if f[0] in names}
        self.planes = [{names[x] for x in f[2::3] if x in names} for f in terms['plane'] if any(x in names for x in f[2::3])]
        with open(f'{MONOMERS}/{name[0].lower()}/{name}.cif', encoding='latin1') as file:
            text = file.read()
        block = gemmi.cif.read_string(text[text.find('data_'):])[-1]

        def rows(category, *columns):
            return [[gemmi.cif.as_string(x).strip() for x in row] for row in block.find(f'_chem_comp_{category}.', list(columns))]
        self.known_bonds = [(a, b, float(r)) for a, b, r in rows('bond', 'atom_id_1', 'atom_id_2', 'value_dist')]
        self.known_angles = [(a, b, c, float(t)) for a, b, c, t in rows('angle', 'atom_id_1', 'atom_id_2', 'atom_id_3', 'value_angle')]
        self.known_hands = [r for r in rows('chir', 'atom_id_centre', 'atom_id_1', 'atom_id_2', 'atom_id_3', 'volume_sign')
                            if r[4].startswith(('pos', 'neg'))]  # others are marked as of both hands
        self.known_planes = [{n for _, n in group} for _, group in
                             itertools.groupby(rows('plane_atom', 'plane_id', 'atom_id'), key=lambda r: r[0])]


def rms(values):
    return math.sqrt(sum(v * v for v in values) / len(values))


def volume_sign(arms, sign, wanted):
    """Sign of the volume of three arms of a tetrahedral centre whose first three arms have the given sign."""
    corners = sign * numpy.array([[1, 1, 1], [1, -1, -1], [-1, 1, -1], [-1, -1, 1]], float)
    return int(numpy.sign(numpy.linalg.det(numpy.array([corners[arms.index(w)] for w in wanted]))))


@unittest.skipUnless(os.path.isdir(MONOMERS), 'no monomer dictionary on this machine')
class Residues(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        names = subprocess.run([DUMP], check=True, capture_output=True, text=True).stdout.split()
        cls.residues = {name: Residue(name) for name in names}

    def test_the_twenty_are_there(self):
        self.assertGreaterEqual(len(self.residues), 20)

    def judge(self, what, differences, most, largest):
        """differences: (value, text)"""
        values = [v for v, _ in differences]
        worst = max(differences, key=lambda d: abs(d[0]))
        print(f'{what}: {len(values)}, r.m.s. {rms(values):.4f}, largest {worst[1]}')
        if VERBOSE:
            print(*(f'    {text} {v:+.3f}\n' for v, text in differences if abs(v) > most), sep='')
        self.assertLessEqual(rms(values), most)
        self.assertLessEqual(abs(worst[0]), largest)

    def test_atoms_and_bonds_are_the_same(self):
        for name, residue in self.residues.items():
            with self.subTest(name):
                known = {frozenset(b[:2]) for b in residue.known_bonds}
                if name in NUCLEOTIDES:
                    known = {bond for bond in known if not bond & END_ATOMS}
                self.assertEqual(set(residue.bonds), known)

    def test_heavy_bonds_agree(self):
        self.judge('heavy bonds, Å', [(r.bonds[frozenset((a, b))] - known, f'{name} {a}-{b} {known}') for name, r in self.residues.items()
                                      for a, b, known in r.known_bonds if 'H' not in (a[0], b[0]) and not {a, b} & END_ATOMS], 0.006, 0.02)

    def test_bonds_of_hydrogen_are_nuclear(self):
        for name, residue in self.residues.items():
            for bond, length in residue.bonds.items():
                heavy = [n for n in bond if n[0] != 'H']
                if len(heavy) == 1:
                    with self.subTest(f'{name} {heavy[0]}'):
                        self.assertIn(round(length, 6), NUCLEAR[heavy[0][0]])

    def angles(self, with_hydrogen):
        return [(r.angles[b, frozenset((a, c))] - known, f'{name} {a}-{b}-{c} {known}') for name, r in self.residues.items()
                for a, b, c, known in r.known_angles
                if ('H' in (a[0], c[0])) == with_hydrogen and not {a, b, c} & END_ATOMS]

    def test_heavy_angles_agree(self):
        self.judge('heavy angles, °', self.angles(False), 0.8, 3)

    def test_angles_with_hydrogen_agree(self):
        self.judge('angles with H, °', self.angles(True), 2, 13)

    def test_hands_agree(self):
        compared = 0
        for name, residue in self.residues.items():
            for centre, a1, a2, a3, sign in residue.known_hands:
                with self.subTest(f'{name} {centre}'):
                    arms, own, fixed = residue.centres[centre]
                    self.assertTrue(fixed)
                    self.assertEqual(volume_sign(arms, own, (a1, a2, a3)), 1 if sign.startswith('pos') else -1)
                    compared += 1
        self.assertGreaterEqual(compared, 21)  # CA of all but glycine, CB of isoleucine and threonine

    def test_each_plane_of_the_dictionary_lies_in_one_of_ours(self):
        compared = 0
        for name, residue in self.residues.items():
            for plane in residue.known_planes:
                if len(plane & residue.atoms) < 4:
                    continue
                with self.subTest(f'{name} {" ".join(sorted(plane))}'):
                    self.assertTrue(any(plane & residue.atoms <= own for own in residue.planes))
                    compared += 1
        self.assertGreaterEqual(compared, 10)


def main():
    outcome = unittest.main(exit=False, argv=sys.argv[:1], testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed, skipped = len(outcome.failures) + len(outcome.errors), len(outcome.skipped)
    print(f'{outcome.testsRun - failed - skipped} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)


if __name__ == '__main__':
    main()

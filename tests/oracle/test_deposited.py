"""Molecules against deposited NMR ensembles of the PDB (entries 2SDF and 1ADZ, open data): names, hands, prochiral names, cis and
trans of planar groups, ranges of proline's ring.

The ensembles are judged by what our tables say; where nearly all of their models disagree with a row, the row is wrong.
"""
import gzip
import math
import os
import subprocess
import sys
import unittest

import gemmi
import numpy

DUMP = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'oracle', 'dump_molecule')
FOLDER = '/usr/share/doc/theseus/examples'
ENTRIES = ('2sdf', '1adz')
FREE, FIXED, PEPTIDE, STAGGERED = range(4)


class Entry:
    def __init__(self, name):
        with gzip.open(f'{FOLDER}/{name}.pdb.gz', 'rt') as file:
            structure = gemmi.read_pdb_string(file.read())
        residues = list(structure[0][0])
        words = [r.name + ('-HG' if r.name == 'CYS' and 'HG' not in {a.name for a in r} else '') for r in residues]
        terms = {key: [] for key in ('atom', 'bond', 'angle', 'torsion', 'centre')}
        for line in subprocess.run([DUMP, *words], check=True, capture_output=True, text=True).stdout.splitlines():
            key, *fields = line.split('\t')
            terms.setdefault(key, []).append(fields)
        self.atoms = [(int(f[1]) - 1, f[2], f[3]) for f in terms['atom']]
        self.terms = terms
        self.deposited = {(i, r.name, a.name) for i, r in enumerate(residues) for a in r}
        self.models = []
        for model in structure:
            points = {(i, a.name): a.pos.tolist() for i, r in enumerate(model[0]) for a in r}
            self.models.append(numpy.array([points.get((i, name), [numpy.nan] * 3) for i, _, name in self.atoms]))

    def label(self, index):
        number, residue, name = self.atoms[index]
        return f'{residue}{number + 1} {name}'


def dihedral(p):
    b0, b1, b2 = p[1] - p[0], p[2] - p[1], p[3] - p[2]
    n1, n2 = numpy.cross(b0, b1), numpy.cross(b1, b2)
    return math.degrees(math.atan2(numpy.cross(n1, n2) @ b1 / numpy.linalg.norm(b1), n1 @ n2))


@unittest.skipUnless(os.path.isdir(FOLDER), 'no deposited ensembles on this machine')
class Deposited(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.entries = {name: Entry(name) for name in ENTRIES}

    def test_every_deposited_atom_has_its_place(self):
        for name, entry in self.entries.items():
            with self.subTest(name):
                # 1ADZ is deposited without the groups of its chain ends, and with one backbone hydrogen on residue 1.
                unknown = {a for a in entry.deposited - set(entry.atoms) if a[0] > 0}
                self.assertEqual(unknown, set())

    def test_hands_and_prochiral_names_agree(self):
        for name, entry in self.entries.items():
            kinds = {}
            for fields in entry.terms['centre']:
                centre, *arms, sign, fixed = map(int, fields)
                if not fixed:
                    continue
                _, residue, atom = entry.atoms[centre]
                for xyz in entry.models:
                    p = xyz[arms[:3]] - xyz[centre]
                    volume = numpy.linalg.det(p)
                    if not math.isnan(volume):
                        kinds.setdefault((residue, atom), []).append((volume > 0) == (sign > 0))
            self.assertGreater(len(kinds), 30)
            for kind, agree in kinds.items():
                with self.subTest(f'{name} {kind}'):
                    self.assertGreaterEqual(sum(agree) / len(agree), 0.99)

    def test_planar_groups_are_cis_and_trans_as_deposited(self):
        for name, entry in self.entries.items():
            kinds = {}
            for fields in entry.terms['torsion']:
                *atoms, kind = map(int, fields[:5])
                angle, tolerance = map(float, fields[5:])
                if kind != FIXED or tolerance > 10:
                    continue
                label = (entry.atoms[atoms[1]][1], *(entry.atoms[a][2] for a in atoms))
                for xyz in entry.models:
                    found = dihedral(xyz[atoms])
                    if not math.isnan(found):
                        kinds.setdefault(label, []).append(abs((found - angle + 180) % 360 - 180) < 90)
            self.assertGreater(len(kinds), 60)
            for kind, agree in kinds.items():
                with self.subTest(f'{name} {kind}'):
                    self.assertGreaterEqual(sum(agree) / len(agree), 0.98)

    def test_prolines_lie_within_their_ranges(self):
        measured = 0
        for name, entry in self.entries.items():
            for fields in entry.terms['torsion']:
                *atoms, kind = map(int, fields[:5])
                angle, tolerance = map(float, fields[5:])
                if kind != FIXED or entry.atoms[atoms[1]][1] != 'PRO' or tolerance < 10:
                    continue
                for xyz in entry.models:
                    found = dihedral(xyz[atoms])
                    if not math.isnan(found):
                        with self.subTest(f'{name} {[entry.label(a) for a in atoms]}'):
                            # Angles other than ours move the outer atoms around the bond, by a few degrees.
                            self.assertLessEqual(abs((found - angle + 180) % 360 - 180), tolerance + 6)
                        measured += 1
        self.assertGreater(measured, 5000)

    def test_bonds_and_angles_are_near_and_angles_within_the_tolerance_of_bounds(self):
        """Both entries were refined with other lengths (rings of 1.40 to 1.41 Å), so bonds are near ours and no more."""
        for name, entry in self.entries.items():
            bonds, angles = [], []
            for a, b, length in entry.terms['bond']:
                a, b = int(a), int(b)
                if 'H' not in (entry.atoms[a][2][0], entry.atoms[b][2][0]):
                    bonds += [numpy.linalg.norm(xyz[a] - xyz[b]) - float(length) for xyz in entry.models]
            for a, b, c, angle in entry.terms['angle']:
                a, b, c = int(a), int(b), int(c)
                for xyz in entry.models:
                    u, v = xyz[a] - xyz[b], xyz[c] - xyz[b]
                    cosine = u @ v / numpy.linalg.norm(u) / numpy.linalg.norm(v)
                    angles.append(math.degrees(math.acos(max(-1, min(1, cosine)))) - float(angle))
            bonds, angles = (numpy.abs(numpy.array(x)[~numpy.isnan(x)]) for x in (bonds, angles))
            print(f'{name}: bonds differ by at most {bonds.max():.3f} Å, {numpy.mean(angles <= 5):.3f} of angles by at most 5°')
            with self.subTest(name):
                self.assertGreater(len(angles), 10000)
                self.assertLessEqual(bonds.max(), 0.05)
                self.assertGreaterEqual(numpy.mean(angles <= 5), 0.985)


def main():
    outcome = unittest.main(exit=False, argv=sys.argv[:1], testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed, skipped = len(outcome.failures) + len(outcome.errors), len(outcome.skipped)
    print(f'{outcome.testsRun - failed - skipped} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)


if __name__ == '__main__':
    main()

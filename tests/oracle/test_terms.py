"""Can all terms of a residue be met together? Each of the twenty, in the middle of a chain of three, is put into space by SciPy
(scipy.optimize.minimize, L-BFGS-B) from random coordinates, by its bonds, angles, planes and signed volumes alone; then bonds,
angles, planes and hands are measured on the coordinates, and proline's torsions against their ranges.
"""
import itertools
import math
import os
import subprocess
import sys
import unittest

import numpy
import scipy.optimize

DUMP = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'oracle', 'dump_molecule')
NAMES = ('ALA ARG ARG-HH12 ASN ASP ASP+HD2 CYS GLN GLU GLU+HE2 GLY HIS HIS-HD1 HIS-HE2 ILE LEU LYS LYS-HZ3 MET PHE PRO SER THR TRP '
         'TYR VAL').split()
FIXED, PEPTIDE = 1, 2
TRIPLES = ((0, 1, 2, 1), (0, 1, 3, -1), (0, 2, 3, 1), (1, 2, 3, -1))  # arms, and the sign of their volume when the first is positive


def across(p, q, angle):
    return math.sqrt(p * p + q * q - 2 * p * q * math.cos(angle))


class Terms:
    def __init__(self, *words):
        rows = {}
        for line in subprocess.run([DUMP, *words], check=True, capture_output=True, text=True).stdout.splitlines():
            key, *fields = line.split('\t')
            rows.setdefault(key, []).append(fields)
        self.names = [f'{f[2]} {f[3]}' for f in rows['atom']]
        self.bonds = [(int(a), int(b), float(r)) for a, b, r in rows['bond']]
        self.angles = [(int(a), int(b), int(c), math.radians(float(t))) for a, b, c, t in rows['angle']]
        self.torsions = [(list(map(int, f[:4])), int(f[4]), float(f[5]), float(f[6])) for f in rows['torsion']]
        self.centres = [(int(f[0]), [int(x) for x in f[1:5] if int(x) >= 0], int(f[5])) for f in rows['centre']]
        self.planes = [[(int(i), float(x), float(y)) for i, x, y in zip(f[2::3], f[3::3], f[4::3])] for f in rows['plane'] if f[1] == '1']
        self.collect()

    def collect(self):
        """Distances with weights, and volumes, as arrays."""
        length = {}
        for a, b, r in self.bonds:
            length[a, b] = length[b, a] = r
        angle = {}
        for a, b, c, t in self.angles:
            angle[b, a, c] = angle[b, c, a] = t
        pairs = [(a, b, r, 1000) for a, b, r in self.bonds]
        pairs += [(a, c, across(length[a, b], length[b, c], t), 300) for a, b, c, t in self.angles]
        for plane in self.planes:
            pairs += [(i, j, math.hypot(xi - xj, yi - yj), 100) for (i, xi, yi), (j, xj, yj) in itertools.combinations(plane, 2)]
        volumes = []
        for centre, arms, sign in self.centres:
            for i, j, k, side in TRIPLES[:1] if len(arms) == 3 else TRIPLES:
                three = [arms[i], arms[j], arms[k]]
                gram = numpy.array([[1 if p == q else math.cos(angle[centre, p, q]) for q in three] for p in three])
                size = math.sqrt(max(0, numpy.linalg.det(gram))) * math.prod(length[centre, p] for p in three)
                volumes.append((centre, *three, side * sign * size))
        for plane in self.planes:
            atoms = [i for i, _, _ in plane]
            volumes += [(*atoms[:3], i, 0) for i in atoms[3:]] + [(*atoms[k:k + 4], 0) for k in range(1, len(atoms) - 3)]
        self.pair = numpy.array([p[:2] for p in pairs])
        self.wanted, self.weight = numpy.array([p[2] for p in pairs]), numpy.array([p[3] for p in pairs], float)
        self.corner = numpy.array([v[:4] for v in volumes])
        self.volume = numpy.array([v[4] for v in volumes])

    def energy(self, flat):
        x = flat.reshape(-1, 3)
        gradient = numpy.zeros_like(x)
        d = x[self.pair[:, 0]] - x[self.pair[:, 1]]
        r = numpy.maximum(numpy.linalg.norm(d, axis=1), 1e-9)
        off = r - self.wanted
        pull = (2 * self.weight * off / r)[:, None] * d
        numpy.add.at(gradient, self.pair[:, 0], pull)
        numpy.add.at(gradient, self.pair[:, 1], -pull)
        c, p, q, s = (x[self.corner[:, k]] for k in range(4))
        u, v, w = p - c, q - c, s - c
        by = (numpy.cross(v, w), numpy.cross(w, u), numpy.cross(u, v))
        miss = numpy.einsum('ij,ij->i', u, by[0]) - self.volume
        for k in range(3):
            push = (2 * 20 * miss)[:, None] * by[k]
            numpy.add.at(gradient, self.corner[:, k + 1], push)
            numpy.add.at(gradient, self.corner[:, 0], -push)
        return (self.weight * off * off).sum() + 20 * (miss * miss).sum(), gradient.ravel()

    def place(self, generator):
        start = generator.normal(0, 4, 3 * len(self.names))
        return scipy.optimize.minimize(self.energy, start, jac=True, method='L-BFGS-B', options={'maxiter': 4000, 'maxfun': 6000, 'ftol': 1e-13})

    def best(self, generator, starts=40, good=0.05):
        """The first of several starts that meets all terms, or the best."""
        found = None
        for _ in range(starts):
            placed = self.place(generator)
            if found is None or placed.fun < found.fun:
                found = placed
            if found.fun < good:
                break
        return found.x.reshape(-1, 3)


def angle_of(x, a, b, c):
    u, v = x[a] - x[b], x[c] - x[b]
    return math.degrees(math.atan2(numpy.linalg.norm(numpy.cross(u, v)), u @ v))


def dihedral_of(x, a, b, c, d):
    b0, b1, b2 = x[b] - x[a], x[c] - x[b], x[d] - x[c]
    n1, n2 = numpy.cross(b0, b1), numpy.cross(b1, b2)
    return math.degrees(math.atan2(numpy.cross(n1, n2) @ b1 / numpy.linalg.norm(b1), n1 @ n2))


def apart(a, b):
    return abs((a - b + 180) % 360 - 180)


class TermsTogether(unittest.TestCase):
    def check(self, terms, x):
        bonds = [numpy.linalg.norm(x[a] - x[b]) - r for a, b, r in terms.bonds]
        angles = [angle_of(x, a, b, c) - math.degrees(t) for a, b, c, t in terms.angles]
        self.assertLessEqual(max(map(abs, bonds)), 0.003)
        self.assertLessEqual(math.sqrt(sum(t * t for t in angles) / len(angles)), 0.2)
        self.assertLessEqual(max(map(abs, angles)), 0.5)
        for centre, arms, sign in terms.centres:
            self.assertGreater(sign * numpy.linalg.det(x[arms[:3]] - x[centre]), 0, terms.names[centre])
        for plane in terms.planes:
            points = x[[i for i, _, _ in plane]]
            self.assertLessEqual(numpy.linalg.svd(points - points.mean(0))[1][-1] / math.sqrt(len(points)), 0.005)
        for atoms, kind, angle, tolerance in terms.torsions:
            if kind in (FIXED, PEPTIDE) and tolerance <= 20:
                found = dihedral_of(x, *atoms)
                self.assertLessEqual(apart(found, angle), 1, [terms.names[a] for a in atoms])

    def test_each_residue_can_be_put_into_space(self):
        generator = numpy.random.default_rng(1)
        for name in NAMES:
            with self.subTest(name):
                terms = Terms('ALA', name, 'GLY')
                self.check(terms, terms.best(generator))

    def test_cis_peptides_and_all_kinds_of_ends_can_be(self):
        generator = numpy.random.default_rng(2)
        for words in (('ALA@cis', 'PRO', 'GLY'), ('PRO', 'ALA', 'SER'), ('neutral', 'ALA', 'GLY'), ('neutral', 'PRO', 'SER'),
                      ('open', 'GLY', 'PRO', 'ALA')):
            with self.subTest(' '.join(words)):
                terms = Terms(*words)
                self.check(terms, terms.best(generator))

    def test_bonds_and_angles_keep_proline_within_its_torsions_ranges(self):
        generator, puckers = numpy.random.default_rng(3), []
        terms = Terms('GLY', 'PRO', 'GLY')
        for _ in range(24):
            placed = terms.place(generator)
            if placed.fun > 0.05:
                continue
            x = placed.x.reshape(-1, 3)
            for atoms, kind, angle, tolerance in terms.torsions:
                if kind == FIXED and tolerance > 20:
                    self.assertLessEqual(apart(dihedral_of(x, *atoms), angle), tolerance, [terms.names[a] for a in atoms])
                    if [terms.names[a] for a in atoms] == ['PRO CA', 'PRO CB', 'PRO CG', 'PRO CD']:
                        puckers.append(dihedral_of(x, *atoms))
        self.assertGreaterEqual(len(puckers), 5)
        self.assertTrue(min(puckers) < -10 and max(puckers) > 10, f'both puckers: {puckers}')


def main():
    outcome = unittest.main(exit=False, argv=sys.argv[:1], testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed, skipped = len(outcome.failures) + len(outcome.errors), len(outcome.skipped)
    print(f'{outcome.testsRun - failed - skipped} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)


if __name__ == '__main__':
    main()

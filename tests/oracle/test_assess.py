"""`trammel assess` on open NMR ensembles (entries 2SDF and 1ADZ of the PDB), against measures written anew with gemmi and numpy:
violations of restraints as (sum r^-6)^(-1/6), dihedrals by IUPAC's sign, missing atoms, renamed chains, mirrored models, exchanged
names. Restraints are drawn at random from the deposited atoms; limits are set so that many are violated."""
import gzip
import json
import os
import random
import subprocess
import tempfile
import unittest

import gemmi
import numpy

TRAMMEL = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'trammel')
FOLDER = '/usr/share/doc/theseus/examples'
ENTRIES = ('2sdf', '1adz')


def read(name):
    with gzip.open(f'{FOLDER}/{name}.pdb.gz', 'rt') as file:
        return gemmi.read_pdb_string(file.read())


def places(model):
    return {(str(r.seqid.num), a.name): numpy.array(a.pos.tolist()) for r in model[0] for a in r}


def dihedral(p):
    b0, b1, b2 = p[1] - p[0], p[2] - p[1], p[3] - p[2]
    n1, n2 = numpy.cross(b0, b1), numpy.cross(b1, b2)
    return numpy.degrees(numpy.arctan2(numpy.cross(n1, n2) @ b1 / numpy.linalg.norm(b1), n1 @ n2))


class Case:
    """A sheet over the chain of an entry: distances with one to three alternatives, some of them with a group, and torsions."""

    def __init__(self, name, seed):
        draw = random.Random(seed)
        self.structure = read(name)
        chain = self.structure[0][0]
        self.residues = [(str(r.seqid.num), r.name, [a.name for a in r]) for r in chain]
        self.first = places(self.structure[0])
        free_cysteine = [n for n, r, atoms in self.residues if r == 'CYS' and 'HG' not in atoms]
        lines = ['sheet 1', f'sequence Q {self.residues[0][0]} ' + ' '.join(r for _, r, _ in self.residues)]
        lines += [f'variant Q {n} -HG' for n in free_cysteine]
        self.distances, self.torsions = [], []
        inner = self.residues[2:-2]
        for k in range(150):
            pairs, words = [], []
            for _ in range(draw.choice((1, 1, 1, 2, 3))):
                side = []
                for _ in range(2):
                    number, _, atoms = draw.choice(inner)
                    name_ = draw.choice([a for a in atoms if a[0] in 'HCNO' and not a[0].isdigit()])
                    side.append((number, name_))
                if side[0] == side[1]:
                    continue
                pairs.append(side)
            if not pairs:
                continue
            r = sum(numpy.linalg.norm(self.first[a] - self.first[b]) ** -6 for a, b in pairs) ** (-1 / 6)
            low, high = sorted((r * draw.uniform(0.8, 1.1), r * draw.uniform(0.9, 1.2)))
            for (a, b) in pairs:
                lines.append(f'limit Q:{a[0]}:{a[1]} Q:{b[0]}:{b[1]} {low:.3f} {high:.3f} as d{k}')
            self.distances.append((f'd{k}', pairs, round(low, 3), round(high, 3)))
        for k in range(30):
            at = draw.randrange(1, len(inner) - 1)
            one, two = inner[at - 1], inner[at]
            atoms = [(one[0], 'C'), (two[0], 'N'), (two[0], 'CA'), (two[0], 'C')]
            middle = dihedral([self.first[a] for a in atoms]) + draw.uniform(-60, 60)
            lower, upper = round((middle - 20 + 180) % 360 - 180, 1), round((middle + 20 + 180) % 360 - 180, 1)
            lines.append('dihedral ' + ' '.join(f'Q:{n}:{a}' for n, a in atoms) + f' {lower} {upper} as t{k}')
            self.torsions.append((f't{k}', atoms, lower, upper))
        self.sheet = '\n'.join(lines) + '\n'

    def expected(self, at):
        out = {}
        for key, pairs, low, high in self.distances:
            there = [(a, b) for a, b in pairs if a in at and b in at]
            r = sum(numpy.linalg.norm(at[a] - at[b]) ** -6 for a, b in there) ** (-1 / 6) if there else None
            out[key] = None if r is None else max(r - high, low - r, 0.0)
        for key, atoms, lower, upper in self.torsions:
            off = (dihedral([at[a] for a in atoms]) - lower) % 360
            width = (upper - lower) % 360
            out[key] = 0.0 if off <= width else min(off - width, 360 - off)
        return out


def assess(structure, sheet, *options):
    with tempfile.TemporaryDirectory() as folder:
        models, limits, report = (os.path.join(folder, n) for n in ('models.pdb', 'limits.sheet', 'report.json'))
        structure.write_pdb(models)
        with open(limits, 'w', encoding='utf-8') as file:
            file.write(sheet)
        done = subprocess.run([TRAMMEL, 'assess', models, limits, '--json', report, *options], capture_output=True, text=True, timeout=120,
                              check=False)
        assert done.returncode in (0, 1), done.stderr
        with open(report, encoding='utf-8') as file:
            return json.load(file), done


@unittest.skipUnless(os.path.isdir(FOLDER), 'no open ensembles on this machine')
class Assess(unittest.TestCase):
    def compare(self, case, structure, report):
        self.assertEqual(report['models'], len(structure))
        worst, seen = 0.0, 0
        by_id = {r['id']: r['violation'] for r in report['restraints']}
        for m, model in enumerate(structure):
            for key, value in case.expected(places(model)).items():
                ours = by_id[key][m]
                self.assertEqual(value is None, ours is None, (key, m))
                if value is not None:
                    worst, seen = max(worst, abs(value - ours)), seen + (value > 0.1)
        self.assertLess(worst, 2e-3)
        self.assertGreater(seen, 50)
        print(f'{seen} violations, largest difference {worst:.6f}')

    def test_violations_are_those_measured_anew(self):
        for seed, name in enumerate(ENTRIES):
            with self.subTest(name):
                case = Case(name, seed)
                report, done = assess(case.structure, case.sheet)
                self.assertEqual(done.returncode, 1)
                self.assertIn('another code', done.stdout)  # the sheet's chain is Q
                self.compare(case, case.structure, report)
                for g in report['geometry']:
                    self.assertEqual((g['wrong_handed'], g['cis_not_pro']), (0, 0))

    def test_missing_atoms_are_left_out(self):
        case = Case('2sdf', 7)
        lost = {case.distances[k][1][0][0] for k in (0, 3, 5)}
        for model in case.structure:
            for residue in model[0]:
                for atom in [a.name for a in residue if (str(residue.seqid.num), a.name) in lost]:
                    residue.remove_atom(atom, '*')
        report, _ = assess(case.structure, case.sheet)
        self.compare(case, case.structure, report)
        self.assertGreaterEqual(report['atoms']['missing'], len(lost))
        self.assertTrue(all(numpy.isfinite([g['bond_rms'], g['angle_rms'], g['plane_max']]).all() for g in report['geometry']))

    def test_mirrored_models_have_wrong_hands(self):
        case = Case('2sdf', 3)
        chiral = sum(r != 'GLY' for _, r, _ in case.residues)
        for model in case.structure:
            for residue in model[0]:
                for atom in residue:
                    atom.pos = gemmi.Position(-atom.pos.x, atom.pos.y, atom.pos.z)
        report, _ = assess(case.structure, case.sheet)
        for g in report['geometry']:
            self.assertGreaterEqual(g['wrong_handed'], chiral)
            self.assertGreater(g['swapped_names'], 0)

    def test_exchanged_names_are_counted(self):
        case = Case('2sdf', 4)
        before, _ = assess(case.structure, case.sheet)
        exchanged = 0
        for residue in case.structure[0][0]:
            names = {a.name: a for a in residue}
            if residue.name in ('LYS', 'ARG', 'LEU', 'SER', 'ASN', 'ASP', 'PHE', 'TYR', 'TRP') and {'HB2', 'HB3'} <= set(names) and exchanged < 3:
                names['HB2'].pos, names['HB3'].pos = names['HB3'].pos, names['HB2'].pos
                exchanged += 1
        after, _ = assess(case.structure, case.sheet)
        self.assertEqual(exchanged, 3)
        self.assertEqual(after['geometry'][0]['swapped_names'] - before['geometry'][0]['swapped_names'], 3)
        self.assertEqual(after['geometry'][0]['wrong_handed'], before['geometry'][0]['wrong_handed'])


if __name__ == '__main__':
    result = unittest.main(exit=False).result
    bad, skipped = len(result.failures) + len(result.errors), len(result.skipped)
    print(f'{result.testsRun - bad - skipped} passed, {bad} failed, {skipped} skipped')
    raise SystemExit(bad > 0)

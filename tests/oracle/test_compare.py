"""`trammel compare` against figures worked out anew from the coordinates, with SciPy (Rotation.align_vectors, scipy.cluster.hierarchy),
NumPy and gemmi's reader: on invented ensembles, and on deposited NMR ensembles of the PDB (entries 2SDF, 1ADZ and 1S40, a complex of
protein and DNA; open data).

The penalty that cuts the clusters is computed from its definition (Kelley, Gardner & Sutcliffe, Protein Eng. 9 (1996) 1063), order
parameters from theirs (Hyberts et al., Protein Sci. 1 (1992) 736); both formulas are typed from memory.
"""
import gzip
import itertools
import json
import math
import os
import subprocess
import sys
import tempfile
import unittest

import gemmi
import numpy
from scipy.cluster.hierarchy import fcluster, linkage
from scipy.spatial.distance import squareform
from scipy.spatial.transform import Rotation

PROGRAM = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'trammel')
FOLDER = '/usr/share/doc/theseus/examples'
BACKBONE = {'N', 'CA', 'C'}
NUCLEIC = {'P', 'O5*', 'C5*', 'C4*', 'C3*', 'O3*'}  # as 1S40 calls them
WATERS = {'HOH', 'DOD', 'WAT', 'H2O'}
NEAR = 2e-5  # Å: figures have six decimals, distances are kept in single precision


def read(path):
    """For each model the places of its atoms, by (chain, number, atom); and the names of residues and the elements. 1S40 has old
    names, with stars for primes; they stay."""
    with (gzip.open if path.endswith('.gz') else open)(path, 'rt') as file:
        structure = gemmi.read_pdb_string(file.read())
    models, residues, elements = [], {}, {}
    for model in structure:
        places = {}
        for chain in model:
            for residue in chain:
                if residue.name in WATERS:
                    continue
                number = str(residue.seqid).strip()
                residues.setdefault((chain.name, number), residue.name)
                for atom in residue:
                    places.setdefault((chain.name, number, atom.name), numpy.array(atom.pos.tolist()))
                    elements.setdefault((chain.name, number, atom.name), atom.element.name)
        models.append(places)
    return models, residues, elements


def shared(models):
    return [key for key in models[0] if all(key in model for model in models)]


def fit(moving, fixed):
    """Rotation, centres and r.m.s. distance."""
    a, b = moving.mean(axis=0), fixed.mean(axis=0)
    rotation, rssd = Rotation.align_vectors(fixed - b, moving - a)
    return rotation, a, b, rssd / len(moving) ** 0.5


def rmsd(one, other):
    return fit(one, other)[3]


def matrix_of(stack):
    out = numpy.zeros((len(stack), len(stack)))
    for i, j in itertools.combinations(range(len(stack)), 2):
        out[i, j] = out[j, i] = rmsd(stack[i], stack[j])
    return out


def superposed(stack, chosen):
    """All models on their mean, over the chosen atoms; and the mean."""
    stack, mean = stack.copy(), stack[0].copy()
    for _ in range(500):
        for m in range(len(stack)):
            rotation, a, b, _ = fit(stack[m][chosen], mean[chosen])
            stack[m] = rotation.apply(stack[m] - a) + b
        before, mean = mean, stack.mean(axis=0)
        if numpy.abs(mean - before).max() < 1e-9:
            break
    return stack, mean


def penalty_clusters(matrix):
    """The clusters with the least penalty, from the definition; it is often the same after the first and after the last merge."""
    count = len(matrix)
    tree = linkage(squareform(matrix, checks=False), 'average')
    stages, clusters = [], {i: [i] for i in range(count)}
    for k, (a, b, _, _) in enumerate(tree):
        clusters[count + k] = clusters.pop(int(a)) + clusters.pop(int(b))
        spreads = [numpy.mean([matrix[i, j] for i, j in itertools.combinations(c, 2)]) for c in clusters.values() if len(c) > 1]
        stages.append((numpy.mean(spreads), [sorted(c) for c in clusters.values()]))
    least, greatest = min(s for s, _ in stages), max(s for s, _ in stages)
    span = greatest - least
    penalties = [(count - 2) / span * (s - least) + 1 + len(c) if span > 0 else 1 + len(c) for s, c in stages]
    return sorted([clusters for (_, clusters), p in zip(stages, penalties) if p < min(penalties) + 1e-6][-1])  # the fewest of equals


def torsion(p):
    b0, b1, b2 = p[1] - p[0], p[2] - p[1], p[3] - p[2]
    n1, n2 = numpy.cross(b0, b1), numpy.cross(b1, b2)
    return math.atan2(numpy.cross(n1, n2) @ b1 / numpy.linalg.norm(b1), n1 @ n2)


def order(models, atoms):
    if not all(atom in model for model in models for atom in atoms):
        return None
    angles = [torsion([model[atom] for atom in atoms]) for model in models]
    return abs(numpy.mean(numpy.exp(1j * numpy.array(angles))))


def record(serial, name, residue, chain, number, place):
    place = ''.join(f'{p:8.3f}' for p in place)
    return f'ATOM  {serial:5} {name if len(name) > 3 else " " + name:4} {residue:3} {chain}{number:4}    {place}  1.00  0.00' \
           f'          {name[0]:>2}'


def write(path, models, names=None):
    """models: places by (chain, number, atom)."""
    with open(path, 'w', encoding='ascii') as file:
        for m, model in enumerate(models):
            print(f'MODEL {m + 1:8}', file=file)
            for k, ((chain, number, name), place) in enumerate(model.items()):
                print(record(k + 1, name, (names or {}).get((chain, number), 'ALA'), chain, int(number), place), file=file)
            print('ENDMDL', file=file)


class Compare(unittest.TestCase):
    def setUp(self):
        folder = tempfile.TemporaryDirectory()
        self.addCleanup(folder.cleanup)
        self.folder = folder.name
        self.random = numpy.random.default_rng(20)

    def path(self, name):
        return os.path.join(self.folder, name)

    def compare(self, *arguments):
        done = subprocess.run([PROGRAM, 'compare', *map(str, arguments), '--json', '-'], check=True, capture_output=True, timeout=300)
        return json.loads(done.stdout)

    def chain_of(self, residues, chain='A', atoms=('N', 'CA', 'C', 'O', 'CB'), start=1):
        """A walk of residues in space: invented."""
        place, out = self.random.normal(size=3) * 10, {}
        for r in range(residues):
            for name in atoms:
                place = place + self.random.normal(size=3) * 1.2
                out[chain, str(start + r), name] = place
        return out

    def moved(self, model):
        rotation, shift = Rotation.random(random_state=int(self.random.integers(1 << 30))), self.random.normal(size=3) * 30
        return {key: rotation.apply(place) + shift for key, place in model.items()}

    def ensemble(self, base, count, noise, loose=(), far=6.0):
        """Noisy copies of a model, each turned and shifted; loose residues stray as a whole."""
        models = []
        for _ in range(count):
            stray = {number: self.random.normal(size=3) * far for number in loose}
            models.append(self.moved({key: place + self.random.normal(size=3) * noise + stray.get(key[1], 0)
                                      for key, place in base.items()}))
        return models

    # ---- what every comparison must meet ----

    def check(self, path, told, cut=None):
        """All figures but the reference's from the core and the atoms that were told."""
        models, residues, elements = read(path)
        atoms = shared(models)
        stack = numpy.array([[model[key] for key in atoms] for model in models])
        labels = {':'.join(key): k for k, key in enumerate(atoms)}
        self.assertEqual(told['atoms'], len(atoms))
        self.assertEqual({atom['atom'] for atom in told['per_atom']}, set(labels))
        chosen = [labels[atom['atom']] for atom in told['per_atom'] if atom['superposed']]
        self.assertEqual(len(chosen), told['superposed']['atoms'])

        matrix = matrix_of(stack[:, chosen])
        off = numpy.abs(numpy.array(told['pairs']['matrix']) - matrix).max()
        self.assertLess(off, NEAR)
        upper = matrix[numpy.triu_indices(len(matrix), 1)]
        for key, value in (('mean', upper.mean()), ('min', upper.min()), ('max', upper.max())):
            self.assertAlmostEqual(told['pairs'][key], value, delta=NEAR)
        others = matrix.sum(axis=0) / (len(matrix) - 1)
        self.assertLess(others[told['medoid'] - 1] - others.min(), NEAR)
        for model, value in zip(told['per_model'], others):
            self.assertAlmostEqual(model['to_others'], value, delta=NEAR)

        lying, mean = superposed(stack, chosen)
        to_mean = [rmsd(model[chosen], mean[chosen]) for model in lying]
        for model, value in zip(told['per_model'], to_mean):
            self.assertAlmostEqual(model['to_mean'], value, delta=1e-4)
        self.assertAlmostEqual(told['to_mean'], numpy.mean(to_mean), delta=1e-4)
        spread = numpy.sqrt(((lying - mean) ** 2).sum(axis=2).mean(axis=0))
        for atom in told['per_atom']:
            self.assertAlmostEqual(atom['spread'], spread[labels[atom['atom']]], delta=1e-4 * max(1, spread.max()))
        heavy = {}
        for key, value in zip(atoms, spread):
            if elements[key] != 'H':
                heavy.setdefault(key[:2], []).append(value)
        for residue in told['per_residue']:
            values = heavy.get(tuple(residue['residue'].split(':')))
            if values:
                self.assertAlmostEqual(residue['heavy_spread'], numpy.sqrt(numpy.mean(numpy.square(values))), delta=1e-3)

        groups = sorted(sorted(m - 1 for m in cluster['models']) for cluster in told['clusters']['list'])
        if cut is None:
            self.assertEqual(groups, penalty_clusters(matrix))
        else:
            flat = fcluster(linkage(squareform(matrix, checks=False), 'average'), cut, 'distance')
            self.assertEqual(groups, sorted([m for m in range(len(matrix)) if flat[m] == k] for k in set(flat)))
        for cluster in told['clusters']['list']:
            members = [m - 1 for m in cluster['models']]
            sums = matrix[numpy.ix_(members, members)].sum(axis=0)
            self.assertLess(sums[members.index(cluster['medoid'] - 1)] - sums.min(), NEAR * len(members))
        return models, residues, atoms, stack, chosen, spread

    def check_core(self, told, atoms, chosen, spread, points):
        """The core repeats itself: superposed on it, its residues are within the cutoff, and no others."""
        squares = {}
        for k, key in enumerate(atoms):
            if key[2] in points:
                squares.setdefault(f'{key[0]}:{key[1]}', []).append(spread[k] ** 2)
        core = set(told['core']['residues'])
        self.assertEqual({f'{atoms[k][0]}:{atoms[k][1]}' for k in chosen}, core)
        for residue, values in squares.items():
            value = math.sqrt(sum(values) / len(values))
            if abs(value - 1.5) > 0.02:
                self.assertEqual(value < 1.5, residue in core, f'{residue} strays by {value:.3f} Å')
            told_value = next(r['spread'] for r in told['per_residue'] if r['residue'] == residue)
            self.assertAlmostEqual(told_value, value, delta=1e-3)

    # ---- invented ensembles ----

    def test_invented_ensembles_and_their_planted_cores(self):
        for count, residues, loose in ((2, 12, ()), (8, 20, range(1, 6)), (25, 30, range(20, 31)), (15, 24, (*range(1, 4), 12, 13))):
            with self.subTest(f'{count} models, {loose}'):
                path = self.path('m.pdb')
                write(path, self.ensemble(self.chain_of(residues), count, 0.3, [str(r) for r in loose]))
                told = self.compare(path)
                _, _, atoms, _, chosen, spread = self.check(path, told)
                self.check_core(told, atoms, chosen, spread, BACKBONE)
                if count > 2:
                    self.assertEqual(told['core']['residues'], [f'A:{r}' for r in range(1, residues + 1) if r not in loose])

    def test_families_are_found_again(self):
        base = self.chain_of(20)
        for families in (2, 3, 5):
            models, origin = [], []
            for f in range(families):
                bent = {key: place + self.random.normal(size=3) * 1.0 for key, place in base.items()}
                count = 4 + f
                models += self.ensemble(bent, count, 0.1)
                origin += [f] * count
            path = self.path('m.pdb')
            write(path, models)
            told = self.compare(path, '--core', 'all')
            self.check(path, told)
            groups = sorted(sorted(m - 1 for m in c['models']) for c in told['clusters']['list'])
            self.assertEqual(groups, sorted([m for m in range(len(models)) if origin[m] == f] for f in range(families)))
            sizes = [len(c['models']) for c in told['clusters']['list']]
            self.assertEqual(sizes, sorted(sizes, reverse=True))

    def test_clusters_at_given_cuts(self):
        path = self.path('m.pdb')
        write(path, self.ensemble(self.chain_of(10), 40, 0.5))
        for cut in (0, 0.6, 0.7, 0.75, 0.8, 0.85, 5):
            with self.subTest(cut):
                self.check(path, self.compare(path, '--core', 'all', '--cut', cut), cut)

    def test_cores_and_atoms_as_asked(self):
        base = {**self.chain_of(10), **self.chain_of(12, 'B', start=-3)}
        path = self.path('m.pdb')
        write(path, self.ensemble(base, 6, 0.4, ['5']))
        everything = {':'.join(key) for key in base}
        cases = (('A:2-4,B:-3-2', 'CA', lambda c, n, a: a == 'CA' and (c == 'A' and 2 <= n <= 4 or c == 'B' and n <= 2)),
                 ('B', 'heavy', lambda c, n, a: c == 'B'),
                 ('3-4,A:9', 'CB,O', lambda c, n, a: a in ('CB', 'O') and (3 <= n <= 4 or c == 'A' and n == 9)),
                 ('A:-7-100', 'all', lambda c, n, a: c == 'A'),
                 ('all', 'backbone', lambda c, n, a: a in BACKBONE))
        for core, words, rule in cases:
            with self.subTest(f'{core} {words}'):
                told = self.compare(path, f'--core={core}', '--atoms', words)
                self.check(path, told)
                expected = {label for label in everything if rule(label.split(':')[0], int(label.split(':')[1]), label.split(':')[2])}
                self.assertEqual({atom['atom'] for atom in told['per_atom'] if atom['superposed']}, expected)

    def test_molecules_without_residues_of_a_polymer(self):
        """A ring with loose arms, and beads: the atoms themselves are what holds together or strays."""
        base = {('A', '1', f'C{k}'): self.random.normal(size=3) * 4 for k in range(14)}
        models = self.ensemble(base, 10, 0.1)
        for model in models:
            for k in (11, 12, 13):
                model['A', '1', f'C{k}'] = model['A', '1', f'C{k}'] + self.random.normal(size=3) * 8
        path = self.path('m.pdb')
        write(path, models, {('A', '1'): 'LIG'})
        told = self.compare(path)
        self.check(path, told)
        self.assertEqual(told['superposed']['chosen'], 'heavy')
        self.assertEqual({atom['atom'] for atom in told['per_atom'] if atom['superposed']}, {f'A:1:C{k}' for k in range(11)})

    # ---- references ----

    def check_reference(self, path, other, told, pairing):
        """pairing: chain of the models to chain of the reference."""
        models, _, _ = read(path)
        references, _, _ = read(other)
        there = set(shared(references))
        keys = [tuple(atom['atom'].split(':')) for atom in told['per_atom'] if atom['superposed']]
        common = [(key, (pairing.get(key[0], '?'), *key[1:])) for key in keys]
        common = [(one, two) for one, two in common if two in there]
        self.assertEqual(told['reference']['superposed_atoms'], len(common))
        if len(references) > 1:
            matrix = matrix_of([numpy.array([reference[two] for _, two in common]) for reference in references])
            sums = matrix.sum(axis=0) / (len(references) - 1)
            self.assertLess(sums[told['reference']['medoid'] - 1] - sums.min(), NEAR)
        target = numpy.array([references[told['reference']['medoid'] - 1][two] for _, two in common])
        values = [rmsd(numpy.array([model[one] for one, _ in common]), target) for model in models]
        for model, value in zip(told['per_model'], values):
            self.assertAlmostEqual(model['to_reference'], value, delta=NEAR)
        for key, value in (('mean', numpy.mean(values)), ('min', min(values)), ('max', max(values))):
            self.assertAlmostEqual(told['reference']['to_models'][key], value, delta=NEAR)
        self.assertAlmostEqual(told['reference']['to_medoid'], values[told['medoid'] - 1], delta=NEAR)
        atoms = shared(models)
        chosen = [atoms.index(key) for key in keys]
        _, mean = superposed(numpy.array([[model[key] for key in atoms] for model in models]), chosen)
        at = {key: mean[k] for k, key in enumerate(atoms)}
        self.assertAlmostEqual(told['reference']['to_mean'], rmsd(numpy.array([at[one] for one, _ in common]), target), delta=1e-4)
        return values[told['medoid'] - 1]

    def test_references_of_one_and_many_models_with_other_atoms(self):
        base = self.chain_of(15)
        path, other = self.path('m.pdb'), self.path('r.pdb')
        write(path, self.ensemble(base, 7, 0.4))
        near = {key: place for key, place in base.items() if key[1] not in ('3', '4') and key[2] != 'O'}
        near['A', '99', 'CA'] = numpy.zeros(3)
        for count in (1, 6):
            write(other, self.ensemble(near, count, 0.3))
            told = self.compare(path, other, '--atoms', 'heavy', '--core', 'all')
            self.check_reference(path, other, told, {'A': 'A'})
            self.assertEqual(told['reference']['superposed_atoms'], 13 * 4)
            self.assertFalse(told['reference']['chains_exchanged'])

    def test_chains_of_another_code_are_found_by_their_residues(self):
        names = {('A', str(r)): ('ALA', 'GLY', 'SER', 'TRP')[r % 4] for r in range(1, 13)}
        names.update({('B', str(r)): ('LEU', 'LYS', 'GLU')[r % 3] for r in range(1, 11)})
        base = {**self.chain_of(12, 'A'), **self.chain_of(10, 'B')}
        path, other = self.path('m.pdb'), self.path('r.pdb')
        write(path, self.ensemble(base, 5, 0.3), names)
        code = {'A': 'X', 'B': 'Q'}
        order_of_chains = sorted(base.items(), key=lambda item: item[0][0], reverse=True)
        renamed = {(code[c], n, a): place for (c, n, a), place in order_of_chains}
        write(other, self.ensemble(renamed, 1, 0.3), {(code[c], n): name for (c, n), name in names.items()})
        told = self.compare(path, other)
        self.check_reference(path, other, told, code)
        self.assertEqual({chain['models']: chain['reference'] for chain in told['reference']['chains']}, code)
        self.assertEqual(told['reference']['residues_of_other_name'], 0)

    def test_alike_chains_are_exchanged_where_that_fits_best(self):
        unit = self.chain_of(8)
        for copies in (2, 3, 4):
            chains = 'ABCD'[:copies]
            turns = [(Rotation.random(random_state=k), self.random.normal(size=3) * 15) for k in range(copies)]
            base = {(chain, n, a): turn.apply(place) + shift for chain, (turn, shift) in zip(chains, turns) for (_, n, a), place in unit.items()}
            path, other = self.path('m.pdb'), self.path('r.pdb')
            write(path, self.ensemble(base, 5, 0.3))
            for truth in itertools.permutations(chains):
                there = dict(zip(chains, truth))
                renamed = {(there[c], n, a): place for (c, n, a), place in base.items()}
                write(other, self.ensemble(dict(sorted(renamed.items())), 3, 0.3))
                told = self.compare(path, other)
                with self.subTest(there):
                    ours = self.check_reference(path, other, told, there)
                    self.assertEqual({chain['models']: chain['reference'] for chain in told['reference']['chains']}, there)
                    self.assertEqual(told['reference']['chains_exchanged'], there != dict(zip(chains, chains)))
                    self.assertLess(ours, 1)

    # ---- deposited ensembles ----

    @unittest.skipUnless(os.path.isdir(FOLDER), 'no deposited ensembles on this machine')
    def test_deposited_ensembles(self):
        for entry in ('2sdf', '1adz', '1s40'):
            path = f'{FOLDER}/{entry}.pdb.gz'
            for core, words in (('spread', 'backbone'), ('order', 'backbone'), ('all', 'heavy')):
                with self.subTest(f'{entry} {core} {words}'):
                    told = self.compare(path, '--core', core, '--atoms', words)
                    models, residues, atoms, _, chosen, spread = self.check(path, told)
                    self.assertGreater(len(models), 5)
                    if core == 'spread':
                        self.check_core(told, atoms, chosen, spread, BACKBONE | NUCLEIC)
                    self.check_order(models, residues, told, core == 'order')
                    if entry == '1s40' and core == 'spread':
                        self.assertTrue(any(atoms[k][2] == 'C4*' for k in chosen))

    @unittest.skipUnless(os.path.isdir(FOLDER), 'no deposited ensembles on this machine')
    def test_mmcif_gives_the_same_figures_as_pdb(self):
        for entry in ('2sdf', '1s40'):
            with gzip.open(f'{FOLDER}/{entry}.pdb.gz', 'rt') as file:
                text = file.read()
            structure = gemmi.read_pdb_string(text)
            structure.setup_entities()
            structure.make_mmcif_document().write_file(self.path('m.cif'))
            told = self.compare(f'{FOLDER}/{entry}.pdb.gz', f'{FOLDER}/{entry}.pdb.gz')
            self.assertEqual(self.compare(self.path('m.cif'), f'{FOLDER}/{entry}.pdb.gz'), told)
            self.assertLess(told['reference']['to_medoid'], 1e-5)
            self.assertEqual(told['reference']['medoid'], told['medoid'])

    def check_order(self, models, residues, told, is_core):
        names, count = list(residues), 0
        for residue in told['per_residue']:
            chain, number = residue['residue'].split(':')
            at = names.index((chain, number))
            before = names[at - 1] if at > 0 else ('', '')
            after = names[at + 1] if at + 1 < len(names) else ('', '')
            here = [(chain, number, name) for name in ('N', 'CA', 'C')]
            phi = order(models, [(*before, 'C'), *here]) if before[0] == chain else None
            psi = order(models, [*here, (*after, 'N')]) if after[0] == chain else None
            for key, value in (('order_phi', phi), ('order_psi', psi)):
                if value is None:
                    self.assertIsNone(residue[key], residue)
                else:
                    self.assertAlmostEqual(residue[key], value, delta=1e-5)
                    count += 1
            if is_core:
                known = [value for value in (phi, psi) if value is not None]
                self.assertEqual(residue['core'], bool(known) and min(known) >= 0.9)
        self.assertGreater(count, 50)


def main():
    outcome = unittest.main(exit=False, argv=sys.argv[:1], testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed, skipped = len(outcome.failures) + len(outcome.errors), len(outcome.skipped)
    print(f'{outcome.testsRun - failed - skipped} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)


if __name__ == '__main__':
    main()

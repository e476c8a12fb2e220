"""Component dictionaries against the built-in residues and for themselves, with entries of the open monomer dictionary as input.

The twenty amino acids and eight nucleotides: each entry is written as a CIF of its own (into a folder of the moment), and a chain ALA-X-ALA
(or the like) is built from it and from the built-in tables. Atoms must be the same, bonds agree within 0.02 Å, angles within 3 degrees, hands and planes be equal;
the dictionary's X-H lengths are those of electron clouds, ours nuclear. Four angles differ on purpose: see test_residues.py for
CB-SG-HG; the others are in LOOSE, with the reason.

Then a sample of its entries, whatever they are: one model of each, by the program, has right hands and bonds within 0.01 Å r.m.s.

  test_components.py [-v] [COUNT [SEED]]     -v lists each entry of the sample; 60 of them by default, SOAK=1: 600
"""
import json
import os
import random
import subprocess
import sys
import tempfile
import unittest

import gemmi
import numpy

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
DUMP, PROGRAM = os.path.join(BUILD, 'oracle', 'dump_molecule'), os.path.join(BUILD, 'trammel')
MONOMERS = '/usr/share/refmac/monomers'
VERBOSE = '-v' in sys.argv
WORDS = [int(a) for a in sys.argv[1:] if a.isdigit()]
COUNT = WORDS[0] if WORDS else 600 if os.environ.get('SOAK') else 60
SEED = WORDS[1] if len(WORDS) > 1 else 1
NAMES = 'ALA ARG ASN ASP CYS GLN GLU GLY HIS ILE LEU LYS MET PHE PRO SER THR TRP TYR VAL'.split()
DNA, RNA = 'DA DC DG DT'.split(), 'A C G U'.split()
LOOSE = {('CYS', 'SG')}  # C-S-H: 109 in the dictionary, 96.5 in methanethiol


def entry(name):
    with open(f'{MONOMERS}/{name[0].lower()}/{name}.cif', encoding='latin1') as file:
        text = file.read()
    return gemmi.cif.read_string(text[text.find('data_'):])[-1]


def rows(block, category, *columns):
    return [[gemmi.cif.as_string(x).strip() for x in row] for row in block.find(f'_chem_comp_{category}.', list(columns))]


def loop(category, columns, values):
    lines = ['loop_'] + [f'_chem_comp_{category}.{c}' for c in columns]
    return '\n'.join(lines + [' '.join(gemmi.cif.quote(v) for v in row) for row in values]) + '\n' if values else ''


def neighbour(name):
    """What stands before and after a residue: another one of its kind."""
    kinds = ((DNA, ('DT', 'DA')), (RNA, ('U', 'A')))
    first, second = next((pair for names, pair in kinds if name in names), ('ALA', 'GLY'))
    return second if name == first else first


def place(folder, name):
    """Coordinates of the residue in a chain, from a model that the program builds with its built-in tables."""
    sheet, models = os.path.join(folder, 'place.sheet'), os.path.join(folder, 'place.cif')
    with open(sheet, 'w', encoding='utf8') as file:
        file.write(f'sheet 1\nsequence A 1 {neighbour(name)} {name} {neighbour(name)}\n')
    subprocess.run([PROGRAM, 'build', sheet, '-n', '1', '-o', models], check=True, capture_output=True)
    return {a.name: a.pos.tolist() for a in gemmi.read_structure(models)[0][0][1]}


def archive_text(name, xyz=None):
    """The entry as the archive would write it: with target values, or with coordinates in their place."""
    block = entry(name)
    kind = 'DNA LINKING' if name in DNA else 'RNA LINKING' if name in RNA else 'L-PEPTIDE LINKING'
    text = f"data_{name}\n_chem_comp.id {name}\n_chem_comp.type '{kind}'\n"
    atoms = [a for a in rows(block, 'atom', 'atom_id', 'type_symbol') if not xyz or a[0] in xyz]
    if xyz:
        columns = ['pdbx_model_Cartn_x_ideal', 'pdbx_model_Cartn_y_ideal', 'pdbx_model_Cartn_z_ideal']
        text += loop('atom', ['comp_id', 'atom_id', 'type_symbol', *columns], [[name, *a, *(f'{v:.3f}' for v in xyz[a[0]])] for a in atoms])
    else:
        text += loop('atom', ['comp_id', 'atom_id', 'type_symbol'], [[name, *a] for a in atoms])
    orders = {'sin': 'SING', 'dou': 'DOUB', 'tri': 'TRIP', 'aro': 'AROM', 'del': 'DELO'}
    bonds = rows(block, 'bond', 'atom_id_1', 'atom_id_2', 'type', 'value_dist')
    if xyz:
        bonds = [b for b in bonds if b[0] in xyz and b[1] in xyz]
        return text + loop('bond', ['comp_id', 'atom_id_1', 'atom_id_2', 'value_order'], [[name, a, b, orders[o[:3]]] for a, b, o, _ in bonds])
    text += loop('bond', ['comp_id', 'atom_id_1', 'atom_id_2', 'value_order', 'value_dist'], [[name, a, b, orders[o[:3]], d] for a, b, o, d in bonds])
    for category, columns in (('angle', ['atom_id_1', 'atom_id_2', 'atom_id_3', 'value_angle']),
                              ('chir', ['id', 'atom_id_centre', 'atom_id_1', 'atom_id_2', 'atom_id_3', 'volume_sign']),
                              ('plane_atom', ['plane_id', 'atom_id'])):
        text += loop(category, ['comp_id', *columns], [[name, *r] for r in rows(block, category, *columns)])
    return text


class Residue:
    """The second residue of a chain, by atom names."""

    def __init__(self, *words):
        terms = {}
        for line in subprocess.run([DUMP, *words], check=True, capture_output=True, text=True).stdout.splitlines():
            key, *fields = line.split('\t')
            terms.setdefault(key, []).append(fields)
        names = {f[0]: f[3] for f in terms['atom'] if f[1] == '2'}
        self.elements = {f[3]: f[4] for f in terms['atom'] if f[1] == '2'}
        self.bonds = {frozenset((names[a], names[b])): float(r) for a, b, r in terms['bond'] if a in names and b in names}
        self.angles = {(names[b], frozenset((names[a], names[c]))): float(t) for a, b, c, t in terms['angle']
                       if a in names and b in names and c in names}
        self.centres = {names[f[0]]: ([names.get(x) for x in f[1:5]], int(f[5])) for f in terms['centre'] if f[0] in names and f[6] == '1'}
        self.planes = [{names[x] for x in f[2::3] if x in names and self.elements[names[x]] != 'H'} for f in terms['plane']
                       if any(x in names for x in f[2::3])]
        self.shaped = all(f[1] == '1' for f in terms['plane'])


def hand(arms, sign, wanted):
    """Sign of the volume of three arms of a tetrahedral centre whose first three arms have the given sign."""
    corners = sign * numpy.array([[1, 1, 1], [1, -1, -1], [-1, 1, -1], [-1, -1, 1]], float)
    return int(numpy.sign(numpy.linalg.det(numpy.array([corners[arms.index(w)] for w in wanted]))))


@unittest.skipUnless(os.path.isdir(MONOMERS), 'no monomer dictionary on this machine')
class BuiltIn(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.pairs = {}
        with tempfile.TemporaryDirectory() as folder:
            for name in NAMES + DNA + RNA:
                sheet = os.path.join(folder, 'chain.sheet')
                with open(sheet, 'w', encoding='utf8') as file:
                    file.write(f'sheet 1\nsequence A 1 {neighbour(name)} {name} {neighbour(name)}\n')
                beside = neighbour(name)
                for targets in (True, False):
                    path = os.path.join(folder, f'{name}.cif')
                    with open(path, 'w', encoding='utf8') as file:
                        file.write(archive_text(name, None if targets else place(folder, name)))
                    cls.pairs[name, targets] = Residue(beside, name, beside), Residue('inputs', sheet, path)

    def each(self, targets):
        for name in NAMES + DNA + RNA:
            with self.subTest(name):
                yield name, *self.pairs[name, targets]

    def test_atoms_are_the_same(self):
        for targets in (True, False):
            for _, own, made in self.each(targets):
                self.assertEqual(own.elements, made.elements)

    def test_bonds_agree(self):
        worst = 0
        for name, own, made in self.each(True):
            self.assertEqual(set(own.bonds), set(made.bonds))
            for bond, length in own.bonds.items():
                hydrogen = any(own.elements[a] == 'H' for a in bond)
                worst = max(worst, abs(made.bonds[bond] - length))
                self.assertLessEqual(abs(made.bonds[bond] - length), 1e-6 if hydrogen else 0.02, f'{name} {sorted(bond)}')
        print(f'bonds: largest difference {worst:.4f} Å')

    def test_angles_agree(self):
        worst = 0
        for name, own, made in self.each(True):
            self.assertEqual(set(own.angles), set(made.angles))
            for (centre, arms), degrees in own.angles.items():
                if (name, centre) in LOOSE:
                    continue
                worst = max(worst, abs(made.angles[centre, arms] - degrees))
                self.assertLessEqual(abs(made.angles[centre, arms] - degrees), 3, f'{name} {centre} {sorted(arms)}')
        print(f'angles: largest difference {worst:.2f} degrees')

    def test_hands_are_equal(self):
        compared = 0
        for targets in (True, False):
            for name, own, made in self.each(targets):
                for centre, (arms, sign) in own.centres.items():
                    with self.subTest(f'{name} {centre}'):
                        if targets and centre not in made.centres:
                            continue  # prochiral: two hydrogens that only coordinates tell apart
                        self.assertIn(centre, made.centres)
                        theirs, their_sign = made.centres[centre]
                        wanted = [a for a in arms if a is not None][:3]
                        self.assertEqual(hand(theirs, their_sign, wanted), hand(arms, sign, wanted))
                        compared += 1
        print(f'hands: {compared}')
        self.assertGreater(compared, 80)

    def test_planes_are_equal_up_to_hydrogens(self):
        for targets in (True, False):
            for name, own, made in self.each(targets):
                flat = [p for p in own.planes if len(p) >= 4]
                for plane in flat:
                    self.assertTrue(any(plane <= theirs for theirs in made.planes), f'{name} {sorted(plane)}')
                for plane in made.planes:
                    self.assertTrue(any(plane <= ours for ours in own.planes), f'{name} {sorted(plane)}')
                self.assertTrue(made.shaped)

    def test_coordinates_alone_give_the_same_geometry_nearly(self):
        for name, own, made in self.each(False):
            for bond, length in own.bonds.items():
                self.assertLessEqual(abs(made.bonds[bond] - length), 0.06, f'{name} {sorted(bond)}')


@unittest.skipUnless(os.path.isdir(MONOMERS), 'no monomer dictionary on this machine')
class Sample(unittest.TestCase):
    def build(self, folder, path):
        name = os.path.basename(path)[:-4]
        sheet, models, summary = (os.path.join(folder, f) for f in ('one.sheet', 'one.cif', 'one.json'))
        with open(sheet, 'w', encoding='utf8') as file:
            file.write(f'sheet 1\ncomponent {name} {path}\nsequence A 1 {name}\n')
        done = subprocess.run([PROGRAM, 'build', sheet, '-n', '1', '--trials', '5', '-o', models, '--summary', summary], capture_output=True,
                              text=True, timeout=600, check=False)
        self.assertEqual(done.returncode, 0, f'{name}: {done.stdout[-300:]}{done.stderr[-300:]}')
        with open(summary, encoding='utf8') as file:
            return json.load(file)

    def test_each_builds_one_good_model(self):
        files = sorted(os.path.join(folder, f) for folder, _, names in os.walk(MONOMERS) for f in names
                       if f.endswith('.cif') and len(os.path.basename(folder)) == 1)
        worst = 0
        with tempfile.TemporaryDirectory() as folder:
            names = [os.path.basename(path)[:-4] for path in random.Random(SEED).sample(files, COUNT)]
            for path in (f'{MONOMERS}/{name[0].lower()}/{name}.cif' for name in names if len(rows(entry(name), 'atom', 'atom_id')) > 1):
                with self.subTest(os.path.basename(path)):
                    geometry = self.build(folder, path)['models'][0]['geometry']
                    if VERBOSE:
                        print(os.path.basename(path), geometry)
                    worst = max(worst, geometry['bond_rms'])
                    self.assertEqual(geometry['wrong_handed'], 0)
                    self.assertLessEqual(geometry['bond_rms'], 0.01)
        print(f'sample of {COUNT}: largest bond r.m.s. {worst:.4f} Å')

    def test_elements_and_bond_orders_alone_come_near_the_dictionary_s_targets(self):
        """What topology_geometry.c expects against target values, r.m.s.; the dictionary's own are round numbers by atom type."""
        lengths, angles = [], []
        files = sorted(os.path.join(folder, f) for folder, _, names in os.walk(MONOMERS) for f in names
                       if f.endswith('.cif') and len(os.path.basename(folder)) == 1)
        with tempfile.TemporaryDirectory() as folder:
            dictionary, sheet = os.path.join(folder, 'bare.cif'), os.path.join(folder, 'bare.sheet')
            for path in random.Random(SEED + 1).sample(files, COUNT):
                name = os.path.basename(path)[:-4]
                block = entry(name)
                elements = {a: e.upper() for a, e in rows(block, 'atom', 'atom_id', 'type_symbol')}
                bonds = rows(block, 'bond', 'atom_id_1', 'atom_id_2', 'type', 'value_dist')
                with open(dictionary, 'w', encoding='utf8') as file:
                    file.write(f'data_{name}\n_chem_comp.id {name}\n')
                    file.write(loop('atom', ['comp_id', 'atom_id', 'type_symbol'], [[name, a, e] for a, e in elements.items()]))
                    file.write(loop('bond', ['comp_id', 'atom_id_1', 'atom_id_2', 'type'], [[name, a, b, o] for a, b, o, _ in bonds]))
                with open(sheet, 'w', encoding='utf8') as file:
                    file.write(f'sheet 1\nsequence A 1 {name}\n')
                terms = [line.split('\t') for line in subprocess.run([DUMP, 'inputs', sheet, dictionary], check=True, capture_output=True,
                                                                     text=True).stdout.splitlines()]
                names = {f[1]: f[4] for f in terms if f[0] == 'atom'}
                made = {frozenset((names[f[1]], names[f[2]])): float(f[3]) for f in terms if f[0] == 'bond'}
                bent = {(names[f[2]], frozenset((names[f[1]], names[f[3]]))): float(f[4]) for f in terms if f[0] == 'angle'}
                lengths += [made[frozenset((a, b))] - float(d) for a, b, _, d in bonds if 'H' not in (elements[a], elements[b])]
                angles += [bent[b, frozenset((a, c))] - float(t) for a, b, c, t in
                           rows(block, 'angle', 'atom_id_1', 'atom_id_2', 'atom_id_3', 'value_angle')
                           if 'H' not in (elements[a], elements[c]) and (b, frozenset((a, c))) in bent]
        spread = [numpy.sqrt(numpy.mean(numpy.square(v))) for v in (lengths, angles)]
        print(f'topology alone: {len(lengths)} lengths off by {spread[0]:.3f} Å r.m.s., {len(angles)} angles by {spread[1]:.1f} degrees')
        self.assertLessEqual(spread[0], 0.05)
        self.assertLessEqual(spread[1], 5)


def main():
    outcome = unittest.main(exit=False, argv=sys.argv[:1], testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed, skipped = len(outcome.failures) + len(outcome.errors), len(outcome.skipped)
    print(f'{outcome.testsRun - failed - skipped} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)


if __name__ == '__main__':
    main()

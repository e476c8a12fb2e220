"""Tables against outside readers and references: the same files read by Python's csv module; chi angles as Biopython
defines them; old hydrogen names against deposited coordinates with old names (1S40) and present ones (2SDF)."""
import csv
import gzip
import io
import os
import random
import subprocess
import sys
import tempfile
import unittest

import gemmi
import numpy
from Bio.PDB.ic_data import ic_data_sidechains

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
DEPOSITED = '/usr/share/doc/theseus/examples'
DEMO = os.path.join(os.path.dirname(os.path.abspath(__file__)), '..', '..', 'restraints')
RESIDUES = 'ALA ARG ASN ASP CYS GLN GLU GLY HIS ILE LEU LYS MET PHE PRO SER THR TRP TYR VAL'.split()
SHEET = 'sheet 1\nsequence A 1 ' + ' '.join(RESIDUES) + '\nsequence B 101 ' + ' '.join(RESIDUES) + '\n'


class Dump:
    """What the library makes of inputs and tables: restraints by list and id, atoms by their addresses."""

    def __init__(self, inputs, *tables):
        command = [os.path.join(BUILD, 'oracle', 'dump_restraints'), *inputs]
        for table in tables:
            command += ['--table', *table]
        done = subprocess.run(command, capture_output=True, text=True, timeout=120, check=False)
        assert done.returncode == 0, (tables, done.stderr)
        self.atoms, self.distances, self.dihedrals, self.unmapped, self.notes = {}, {}, {}, [], []
        for line in done.stdout.splitlines():
            kind, *f = line.split('\t')
            if kind == 'atom':
                self.atoms[f[0]] = (f[1], f[2], f[4])
            elif kind == 'distance':
                current = self.distances[f[0], f[1]] = [float(f[2]), float(f[3]), set()]
            elif kind == 'alternative':
                current[2].add(tuple(frozenset(self.atoms[a] for a in side.split(',')) for side in f[1:3]))
            elif kind == 'dihedral':
                current = self.dihedrals[f[0], f[1]] = []
            elif kind == 'interval':
                current.append((tuple(self.atoms[a] for a in f[:4]), float(f[4]), float(f[5])))
            elif kind == 'unmapped':
                self.unmapped.append(f)
            else:
                self.notes.append(f[0])


def read(text, columns, form='-', old_names='-', sheet=SHEET):
    with tempfile.TemporaryDirectory() as folder:
        paths = [os.path.join(folder, name) for name in ('a.sheet', 'a.table')]
        for path, content in zip(paths, (sheet, text)):
            with open(path, 'w', encoding='utf-8', newline='') as file:
                file.write(content)
        return Dump(paths[:1], (paths[1], columns, form, old_names))


def number(text, decimal_comma):
    return float(text.replace(',', '.') if decimal_comma else text)


class SameAsCsv(unittest.TestCase):
    """Random tables in many dialects: what Python's csv reads from a file is what the library makes restraints of."""
    SEPARATORS = {'tab': '\t', 'comma': ',', 'semicolon': ';', 'bar': '|'}
    ATOMS = ('N', 'CA', 'C', 'O', 'HA')  # not of glycine and proline alone, so that every residue below has them

    def make(self, generator):
        separator = generator.choice(sorted(self.SEPARATORS))
        comma = separator != 'comma' and generator.random() < 0.4
        nm, heading = generator.random() < 0.3, generator.random() < 0.5
        fields = ['chain_1', 'residue_1', 'residue_name_1', 'atom_1', 'chain_2', 'residue_2', 'residue_name_2', 'atom_2', 'id', '-', '-']
        fields += generator.choice((['lower', 'upper'], ['target', 'error'], ['target', 'minus', 'plus'], ['upper']))
        generator.shuffle(fields)
        text = io.StringIO()
        writer = csv.writer(text, delimiter=self.SEPARATORS[separator], quoting=generator.choice((csv.QUOTE_MINIMAL, csv.QUOTE_ALL)),
                            lineterminator=generator.choice(('\n', '\r\n')))
        names = [f'{name} of {k}' if name != '-' else f'no, "{k}"' for k, name in enumerate(fields)]
        if heading:
            writer.writerow(names)
        for row in range(generator.randrange(1, 40)):
            values = {'id': f'set {generator.randrange(20)} "x"' if generator.random() < 0.8 else '',
                      '-': generator.choice(('', '7', 'a; b,c\t|"d'))}
            for side in '12':
                k = generator.choice([k for k, name in enumerate(RESIDUES) if name != 'GLY'])
                chain, letter = generator.choice('AB'), gemmi.find_tabulated_residue(RESIDUES[k]).one_letter_code.upper()
                values |= {f'chain_{side}': chain, f'residue_{side}': str(k + (101 if chain == 'B' else 1)),
                           f'residue_name_{side}': generator.choice((RESIDUES[k], RESIDUES[k].lower(), letter, '')),
                           f'atom_{side}': self.ATOMS[row % 5] if side == '1' else generator.choice(('CB', 'CA', 'C'))}
            if values['atom_1'] == values['atom_2']:
                values['atom_1'] = 'O'
            lower = generator.uniform(0, 4)
            numbers = {'lower': lower, 'upper': lower + generator.uniform(0, 5), 'target': lower + 2, 'error': generator.uniform(0, 3),
                       'minus': generator.uniform(0, 3), 'plus': generator.uniform(0, 3)}
            values |= {name: f'{value:.3f}'.replace('.', ',' if comma else '.') for name, value in numbers.items()}
            if 'lower' in fields and generator.random() < 0.2:
                values[generator.choice(('lower', 'upper'))] = generator.choice(('', '-'))
            writer.writerow([values[name] for name in fields])
        words = list(fields)
        if heading and generator.random() < 0.6:
            words = [f"{name}@'{names[k]}'" for k, name in enumerate(fields) if name != '-']
            generator.shuffle(words)
        form = [separator] * (generator.random() < 0.5 or separator == 'bar' or 'a; b' in text.getvalue())
        form += ['decimal-comma'] * comma + ['nm'] * nm + ['heading' if heading else 'no-heading'] * (generator.random() < 0.5)
        return text.getvalue(), ' '.join(words), ' '.join(form), fields, self.SEPARATORS[separator], comma, nm, heading

    def expected(self, text, fields, separator, comma, nm, heading):
        rows = list(csv.reader(io.StringIO(text, newline=''), delimiter=separator))[heading:]
        found = {}
        for k, row in enumerate(rows):
            value = dict(zip(fields, row))
            numbers = {name: number(value[name], comma) if value[name] not in ('', '-') else None
                       for name in ('lower', 'upper', 'target', 'error', 'minus', 'plus') if name in value}
            if 'target' in numbers:
                lower = max(0, numbers['target'] - numbers.get('error', numbers.get('minus')))
                upper = numbers['target'] + numbers.get('error', numbers.get('plus'))
            else:
                lower, upper = numbers.get('lower') or 0, numbers['upper'] if numbers['upper'] is not None else float('inf')
            if numbers.get('lower', 0) is None and numbers.get('upper', 0) is None:
                continue
            pair = tuple(frozenset([(value[f'chain_{s}'], value[f'residue_{s}'], value[f'atom_{s}'])]) for s in '12')
            if pair[0] == pair[1]:
                continue
            scale = 10 if nm else 1
            entry = found.setdefault(('table', value['id'] or f'row{k + 1}'), [lower * scale, upper * scale, set()])
            entry[2].add(pair)
        return found

    def test_random_tables(self):
        generator = random.Random(5)
        seen = 0
        for _ in range(150):
            text, columns, form, *how = self.make(generator)
            dump, expected = read(text, columns, form or '-'), self.expected(text, *how)
            self.assertEqual(set(dump.distances), set(expected), (text, columns, form))
            for key, (lower, upper, pairs) in expected.items():
                got = dump.distances[key]
                self.assertAlmostEqual(got[0], lower, 6, (key, text))
                self.assertTrue(got[1] == upper or abs(got[1] - upper) < 1e-6, (key, got, upper, text))
                self.assertEqual(got[2], pairs, (key, text))
                seen += len(pairs)
        self.assertGreater(seen, 2000)

    def test_the_demo_table(self):
        path = os.path.join(DEMO, 'veilin-labels.csv')
        columns = 'residue_1@first residue_2@second target@distance error@error chain=A atom_1=CB atom_2=CB'
        dump = Dump([os.path.join(DEMO, 'veilin.nef')], (path, columns, 'nm decimal-comma', '-'))
        with open(path, encoding='utf-8', newline='') as file:
            rows = list(csv.DictReader((line for line in file if not line.startswith('#')), delimiter=';'))
        self.assertGreater(len(rows), 9)
        for k, row in enumerate(rows):
            distance, error = (10 * number(row[name], True) for name in ('distance', 'error'))
            lower, upper, pairs = dump.distances['table', f'row{k + 1}']
            self.assertAlmostEqual(lower, distance - error, 6)
            self.assertAlmostEqual(upper, distance + error, 6)
            self.assertEqual(pairs, {tuple(frozenset([('A', row[name][1:], 'CB')]) for name in ('first', 'second'))})


class Angles(unittest.TestCase):
    def test_chi_angles_are_those_of_biopython(self):
        known = {}
        for letter, rows in ic_data_sidechains.items():
            known |= {(letter, row[4]): tuple(row[:4]) for row in rows if len(row) == 5 and str(row[4]).startswith('chi')}
        compared = 0
        for k, name in enumerate(RESIDUES):
            letter = gemmi.find_tabulated_residue(name).one_letter_code
            for chi in ('chi1', 'chi2', 'chi3', 'chi4', 'chi5'):
                dump = read(f'A {k + 1} {letter} {chi} 60 20\n', 'chain residue residue_name angle target error')
                if (letter, chi) not in known:
                    self.assertEqual((len(dump.dihedrals), len(dump.unmapped)), (0, 1), (name, chi))
                    continue
                (made, lower, upper), = dump.dihedrals['table', 'row1']
                self.assertEqual(tuple(atom for _, _, atom in made), known[letter, chi], (name, chi))
                self.assertAlmostEqual(lower, 40, 4)
                self.assertAlmostEqual(upper, 80, 4)
                compared += 1
        self.assertGreater(compared, 35)


class OldNames(unittest.TestCase):
    """Which of two hydrogens on a carbon lies where, seen from the heavy atoms: 2SDF has present names, 1S40 old ones."""
    STEMS = {'HA': 'GLY', 'HB': 'ARG ASN ASP CYS GLN GLU HIS LEU LYS MET PHE PRO SER TRP TYR', 'HG': 'ARG GLN GLU LYS MET PRO',
             'HG1': 'ILE', 'HD': 'ARG LYS PRO', 'HE': 'LYS'}

    def hands(self, path, first, second):
        """By residue name and stem: mean sign of the volume of two hydrogens and two heavy neighbours about the holder."""
        with gzip.open(f'{DEPOSITED}/{path}.pdb.gz', 'rt') as file:
            structure = gemmi.read_pdb_string(file.read())
        found = {}
        for residue in structure[0][0]:
            atoms = {atom.name: numpy.array(atom.pos.tolist()) for atom in residue}
            for stem, names in self.STEMS.items():
                pair = [atoms.get(first(stem)), atoms.get(second(stem))]
                holder = atoms.get('C' + stem[1:])
                if residue.name not in names.split() or any(x is None for x in (*pair, holder)):
                    continue
                heavy = sorted((n for n, x in atoms.items() if n[0] in 'CNOS' and 0.1 < numpy.linalg.norm(x - holder) < 2.0))
                self.assertEqual(len(heavy), 2, (residue, stem, heavy))
                volume = numpy.dot(pair[0] - holder, numpy.cross(pair[1] - holder, atoms[heavy[0]] - atoms[heavy[1]]))
                found.setdefault((residue.name, stem, *heavy), []).append(numpy.sign(volume))
        return {key: numpy.mean(signs) for key, signs in found.items()}

    def test_old_names_of_deposited_coordinates(self):
        if not os.path.exists(f'{DEPOSITED}/1s40.pdb.gz'):
            self.skipTest('no deposited coordinates here')
        present = self.hands('2sdf', lambda stem: stem + '2', lambda stem: stem + '3')
        old = self.hands('1s40', lambda stem: '1' + stem, lambda stem: '2' + stem)
        compared = 0
        for key in sorted(set(present) & set(old)):
            residue, stem = key[:2]
            self.assertEqual((abs(present[key]), abs(old[key])), (1, 1), key)  # one hand throughout
            k = RESIDUES.index(residue) + 1
            dump = read(f'A {k} 1{stem} A {k} 2{stem} 3\n', 'chain_1 residue_1 atom_1 chain_2 residue_2 atom_2 upper', '-', 'hydrogens-1-2')
            (one, two), = dump.distances['table', 'row1'][2]
            names = tuple(next(iter(side))[2] for side in (one, two))
            sign = {(stem + '2', stem + '3'): 1, (stem + '3', stem + '2'): -1}[names]
            self.assertEqual(sign * present[key], old[key], key)
            compared += 1
        self.assertGreater(compared, 12)


if __name__ == '__main__':
    outcome = unittest.main(exit=False, argv=sys.argv[:1], testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed, skipped = len(outcome.failures) + len(outcome.errors), len(outcome.skipped)
    print(f'{outcome.testsRun - failed - skipped} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)

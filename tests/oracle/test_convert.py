"""`trammel convert`: round trips between sheets, NEF and NMR-STAR give the same problem, and what is written is what the formats say.

Problems are compared by atoms, restraints as sets of pairs with limits, and torsions, as dump_restraints tells them. NEF is read by
gemmi: mandatory tags of NEF 1.1 (Gutmanas et al., Nature Struct. Mol. Biol. 22 (2015) 433), from memory."""
import collections
import os
import subprocess
import tempfile
import unittest

import gemmi

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
SETS = os.path.join(os.path.dirname(os.path.abspath(__file__)), '..', '..', 'restraints')
NEF_TAGS = {
    'nef_sequence': ['index', 'chain_code', 'sequence_code', 'residue_name', 'linking', 'residue_variant', 'cis_peptide'],
    'nef_covalent_links': ['chain_code_1', 'sequence_code_1', 'residue_name_1', 'atom_name_1', 'chain_code_2', 'sequence_code_2',
                           'residue_name_2', 'atom_name_2'],
    'nef_distance_restraint': ['index', 'restraint_id', 'restraint_combination_id', 'chain_code_1', 'sequence_code_1', 'residue_name_1',
                               'atom_name_1', 'chain_code_2', 'sequence_code_2', 'residue_name_2', 'atom_name_2', 'weight'],
}
ODD = '''sheet 1
title "An odd peptide; it's \\"quoted\\""
sequence A 1 GLY CYS PRO HIS ASP VAL
sequence A 12B CYS
sequence "Chain two" 1 GLY SER GLY
variant A 5 +HD2
linking A 12B end
peptide A 2 cis
ends "Chain two" neutral
link A:2:SG A:12B:SG
list "first list"
limit A:1:HA% A:6:HGx% 1.8 5.5 as 1 weight 2
limit A:1:HA2 A:6:HA,A:5:HA - 6 as 1
list 'second
limit A:3:HA A:4:H 1.8 - as 1
limit A:3:HA A:5:H 1.8 4 as 'loop_ together one
limit A:3:HA A:6:H 1.8 4 as 'loop_ together one
limit A:3:HB2 A:6:H 1.8 4 as 'loop_ together two
limit A:4:H A:5:H 1.8 4.125
limit "Chain two:2:HB%" A:5:H 1.8 4.125 as data_1
dihedral A:4:C A:5:N A:5:CA A:5:C 170 -170 as "phi 5"
'''.replace('\\"', '')


def dump(path):
    atoms, distances, torsions = {}, [], collections.Counter()
    done = subprocess.run([os.path.join(BUILD, 'oracle', 'dump_restraints'), path], capture_output=True, text=True, timeout=120, check=False)
    assert done.returncode == 0, done.stderr
    for line in done.stdout.splitlines():
        key, *p = line.split('\t')
        if key == 'atom':
            atoms[p[0]] = tuple(p[1:5])
        elif key == 'distance':
            distances.append(((p[2], p[3], p[4]), collections.defaultdict(set)))
        elif key == 'alternative':
            pairs = {tuple(sorted((atoms[a], atoms[b]))) for a in p[1].split(',') for b in p[2].split(',') if a != b}
            distances[-1][1][p[0]] |= pairs
        elif key == 'interval':
            torsions[(tuple(atoms[k] for k in p[:4]), p[4], p[5])] += 1
    return (frozenset(atoms.values()), collections.Counter((limits, frozenset(frozenset(v) for v in combined.values()))
                                                           for limits, combined in distances), torsions)


class RoundTrips(unittest.TestCase):
    def setUp(self):
        self._folder = tempfile.TemporaryDirectory()
        self.folder = self._folder.name

    def tearDown(self):
        self._folder.cleanup()

    def convert(self, source, name):
        path = os.path.join(self.folder, name)
        done = subprocess.run([os.path.join(BUILD, 'trammel'), 'convert', source, '-o', path], capture_output=True, text=True, timeout=120,
                              check=False)
        self.assertEqual(done.returncode, 0, done.stderr)
        return path, done.stderr

    def check(self, source, ways, same_torsions=True):
        first = dump(source)
        self.assertGreater(len(first[0]), 0)
        for way in ways:
            at = source
            for step, kind in enumerate(way):
                at, _ = self.convert(at, f'{"-".join(way)}-{step}.{kind}')
                with self.subTest(f'{os.path.basename(source)} {way} {step}'):
                    after = dump(at)
                    self.assertEqual(first[0], after[0])
                    self.assertEqual(first[1], after[1])
                    if same_torsions:
                        self.assertEqual(first[2], after[2])

    def test_the_demo_set_survives_every_way(self):
        self.check(os.path.join(SETS, 'veilin.nef'), [('sheet', 'nef', 'sheet'), ('str', 'nef', 'str'), ('nef', 'sheet.gz', 'str')])

    def test_nucleic_acids_and_hairpins_do(self):
        for name in ('hairpin.sheet', 'harl-operator.sheet'):
            self.check(os.path.join(SETS, name), [('nef', 'sheet'), ('str', 'sheet')])

    def test_odd_names_lists_and_logic_do(self):
        path = os.path.join(self.folder, 'odd.sheet')
        with open(path, 'w', encoding='utf-8') as file:
            file.write(ODD)
        self.check(path, [('sheet', 'sheet'), ('nef', 'sheet', 'nef')])
        distances = dump(path)[1]
        self.assertEqual(sum(distances.values()), 5)  # the two lists' restraints 1 are not alternatives of each other

    def test_sheets_come_back_as_they_were(self):
        first, _ = self.convert(os.path.join(SETS, 'veilin.nef'), 'one.sheet')
        second, _ = self.convert(first, 'two.sheet')
        with open(first, 'rb') as one, open(second, 'rb') as two:
            self.assertEqual(one.read(), two.read())

    def test_what_is_lost_is_told(self):
        _, said = self.convert(os.path.join(SETS, 'crosslinks.sheet'), 'links.nef')
        self.assertIn('12 single atoms and beads', said)
        _, said = self.convert(os.path.join(SETS, 'veilin.nef'), 'veilin.str')
        self.assertIn('names with x and y', said)

    def test_targets_origins_and_names_of_torsions_stay(self):
        text = """data_t
save_nef_molecular_system
loop_ _nef_sequence.index _nef_sequence.chain_code _nef_sequence.sequence_code _nef_sequence.residue_name 1 A 1 GLY 2 A 2 SER 3 A 3 GLY stop_
save_
save_nef_distance_restraint_list_h
_nef_distance_restraint_list.sf_category nef_distance_restraint_list
_nef_distance_restraint_list.restraint_origin hbond
_nef_distance_restraint_list.potential_type log-harmonic
loop_ _nef_distance_restraint.index _nef_distance_restraint.restraint_id _nef_distance_restraint.chain_code_1
_nef_distance_restraint.sequence_code_1 _nef_distance_restraint.atom_name_1 _nef_distance_restraint.chain_code_2
_nef_distance_restraint.sequence_code_2 _nef_distance_restraint.atom_name_2 _nef_distance_restraint.target_value
_nef_distance_restraint.target_value_uncertainty _nef_distance_restraint.lower_linear_limit _nef_distance_restraint.upper_linear_limit
_nef_distance_restraint.lower_limit _nef_distance_restraint.upper_limit
1 7 A 1 O A 3 H 2.0 0.25 1.5 2.75 1.75 2.25 stop_
save_
save_nef_dihedral_restraint_list_d
_nef_dihedral_restraint_list.sf_category nef_dihedral_restraint_list
loop_ _nef_dihedral_restraint.index _nef_dihedral_restraint.restraint_id _nef_dihedral_restraint.chain_code_1
_nef_dihedral_restraint.sequence_code_1 _nef_dihedral_restraint.atom_name_1 _nef_dihedral_restraint.chain_code_2
_nef_dihedral_restraint.sequence_code_2 _nef_dihedral_restraint.atom_name_2 _nef_dihedral_restraint.chain_code_3
_nef_dihedral_restraint.sequence_code_3 _nef_dihedral_restraint.atom_name_3 _nef_dihedral_restraint.chain_code_4
_nef_dihedral_restraint.sequence_code_4 _nef_dihedral_restraint.atom_name_4 _nef_dihedral_restraint.target_value
_nef_dihedral_restraint.lower_limit _nef_dihedral_restraint.upper_limit _nef_dihedral_restraint.name
1 1 A 1 C A 2 N A 2 CA A 2 C -60 -80 -40 PHI stop_
save_
"""
        source = os.path.join(self.folder, 'targets.nef')
        with open(source, 'w', encoding='utf-8') as file:
            file.write(text)
        nef, said = self.convert(source, 'again.nef')
        self.assertEqual(said, '')
        star, said = self.convert(source, 'again.str')
        self.assertIn('target values and linear limits', said)  # the uncertainty and the linear limits
        back, _ = self.convert(star, 'back.nef')
        for path, whole in ((nef, True), (back, False)):
            frames = {i.frame.name: i.frame for i in gemmi.cif.read(path).sole_block() if i.frame is not None}
            distances, dihedrals = frames['nef_distance_restraint_list_h'], frames['nef_dihedral_restraint_list_d']
            row = distances.find('_nef_distance_restraint.', ['target_value', 'target_value_uncertainty', 'lower_linear_limit',
                                                              'upper_linear_limit', 'lower_limit', 'upper_limit'])[0]
            self.assertEqual(list(row), ['2', '0.25', '1.5', '2.75', '1.75', '2.25'] if whole else ['2', '.', '.', '.', '1.75', '2.25'])
            self.assertEqual(distances.find_value('_nef_distance_restraint_list.restraint_origin'), 'hbond')
            self.assertEqual(distances.find_value('_nef_distance_restraint_list.potential_type'), 'log-harmonic')
            row = dihedrals.find('_nef_dihedral_restraint.', ['target_value', 'lower_limit', 'upper_limit', 'name'])[0]
            self.assertEqual(list(row), ['-60', '-80', '-40', 'PHI'])
        _, said = self.convert(source, 'targets.sheet')
        self.assertIn('2 rows\' target values', said)

    def test_a_single_atom_takes_its_links_with_it(self):
        source = os.path.join(SETS, 'quill.sheet')
        for name in ('quill.nef', 'quill.str'):
            path, said = self.convert(source, name)
            self.assertIn('4 links of single atoms', said)
            done = subprocess.run([os.path.join(BUILD, 'trammel'), 'check', path, os.path.join(SETS, 'quill.cif')], capture_output=True,
                                  text=True, timeout=120, check=False)
            self.assertEqual(done.returncode, 0, done.stderr)
            self.assertIn('6 distance', done.stdout)

    def test_nef_has_its_tags_and_quotes(self):
        path = os.path.join(self.folder, 'odd.sheet')
        with open(path, 'w', encoding='utf-8') as file:
            file.write(ODD)
        nef, _ = self.convert(path, 'odd.nef')
        block = gemmi.cif.read(nef).sole_block()
        frames = {item.frame.name: item.frame for item in block if item.frame is not None}
        meta = frames['nef_nmr_meta_data']
        self.assertEqual(meta.find_value('_nef_nmr_meta_data.format_name'), 'nmr_exchange_format')
        self.assertEqual(meta.find_value('_nef_nmr_meta_data.format_version'), '1.1')
        seen = set()
        for frame in frames.values():
            self.assertTrue(any(item.pair is not None and item.pair[0].endswith('.sf_category') for item in frame))
            for category, tags in NEF_TAGS.items():
                table = frame.find(f'_{category}.', tags)
                if len(table) > 0:
                    seen.add(category)
        self.assertEqual(seen, set(NEF_TAGS))
        sequence = frames['nef_molecular_system'].find('_nef_sequence.', ['chain_code', 'sequence_code', 'residue_name'])
        rows = [tuple(gemmi.cif.as_string(v) for v in row) for row in sequence]
        self.assertEqual(len(rows), 10)
        self.assertIn(('A', '12B', 'CYS'), rows)
        self.assertIn(('Chain two', '2', 'SER'), rows)


if __name__ == '__main__':
    result = unittest.main(exit=False).result
    bad = len(result.failures) + len(result.errors)
    print(f'{result.testsRun - bad} passed, {bad} failed')
    raise SystemExit(bad > 0)

"""Component dictionaries from outside: named by a sheet, beside a NEF file, and in the models that come out. gemmi reads those back."""
import gzip
import os

import gemmi

import harness

QUILL = os.path.join(os.path.dirname(os.path.dirname(harness.HERE)), 'restraints', 'quill')

NEF = '''data_set
save_nef_molecular_system
   _nef_molecular_system.sf_category nef_molecular_system
   loop_
      _nef_sequence.index
      _nef_sequence.chain_code
      _nef_sequence.sequence_code
      _nef_sequence.residue_name
      _nef_sequence.linking
   1 A 1 ALA start
   2 A 2 QSM middle
   3 A 3 GLY end
   4 B 1 QLA nonlinear
   5 B 2 TSS dummy
   stop_
save_
save_nef_distance_restraint_list_1
   _nef_distance_restraint_list.sf_category nef_distance_restraint_list
   loop_
      _nef_distance_restraint.restraint_id
      _nef_distance_restraint.chain_code_1
      _nef_distance_restraint.sequence_code_1
      _nef_distance_restraint.residue_name_1
      _nef_distance_restraint.atom_name_1
      _nef_distance_restraint.chain_code_2
      _nef_distance_restraint.sequence_code_2
      _nef_distance_restraint.residue_name_2
      _nef_distance_restraint.atom_name_2
      _nef_distance_restraint.upper_limit
   1 A 2 QSM HG B 1 QLA H9% 4.5
   stop_
save_
'''


def text_of(path):
    with open(path, encoding='utf-8') as file:
        return file.read()


class Dictionaries(harness.CommandTest):
    def test_a_sheet_names_a_dictionary_beside_it(self):
        self.trammel('check', QUILL + '.sheet')
        os.mkdir(self.path('sets'))
        self.write('sets/quill.cif', gzip.compress(text_of(QUILL + '.cif').encode()))
        self.write('sets/quill.sheet', text_of(QUILL + '.sheet'))
        self.trammel('check', 'sets/quill.sheet')

    def test_a_single_component_takes_the_name_that_the_sheet_gives(self):
        both = text_of(QUILL + '.cif')
        self.write('one.cif', both[:both.index('\ndata_QSM')])
        self.write('one.sheet', 'sheet 1\ncomponent LIG one.cif\nsequence L 1 LIG\n')
        out, _ = self.trammel('check', 'one.sheet')
        self.assertIn('21 atoms in 1 residue', out)
        self.write('two.sheet', f'sheet 1\ncomponent LIG {QUILL}.cif\nsequence L 1 LIG\n')
        _, err = self.trammel('check', 'two.sheet', status=2)
        self.assertIn('two.sheet:2:11: the dictionary has no component LIG; it has QLA, QSM', err)

    def test_what_is_wrong_with_a_named_dictionary(self):
        for text, says in (('component LIG nowhere.cif', 'nowhere.cif'), ('component LIG', 'the path of a component dictionary'),
                           ('component LIG other.cif', 'no component dictionary')):
            self.write('other.cif', 'data_x\n_cell.length_a 10\n')
            self.write('bad.sheet', f'sheet 1\n{text}\nsequence L 1 LIG\n')
            _, err = self.trammel('check', 'bad.sheet', status=2)
            self.assertIn(says, err)

    def test_an_unknown_residue_says_what_to_do(self):
        self.write('bad.sheet', 'sheet 1\nsequence L 1 QLA\n')
        _, err = self.trammel('check', 'bad.sheet', status=2)
        self.assertIn('`component QLA FILE`', err)

    def test_nef_with_a_dictionary_before_after_or_within_it(self):
        self.write('set.nef', NEF)
        out, _ = self.trammel('check', 'set.nef', QUILL + '.cif')
        self.assertEqual(self.trammel('check', QUILL + '.cif', 'set.nef')[0].replace('quill', ''), out.replace('quill', ''))
        self.assertIn('0 unmapped', out)
        self.write('whole.nef', NEF + text_of(QUILL + '.cif'))
        self.assertIn('0 unmapped', self.trammel('check', 'whole.nef')[0])

    def test_a_dictionary_alone_describes_no_molecule(self):
        self.trammel('build', QUILL + '.cif', '-o', 'none.pdb', status=2)
        self.assertFalse(os.path.exists(self.path('none.pdb')))


class Models(harness.CommandTest):
    def build(self, suffix):
        self.trammel('build', QUILL + '.sheet', '-n', '2', '-o', 'models' + suffix)
        return gemmi.read_structure(self.path('models' + suffix))

    def test_other_residues_are_hetatm_and_their_bonds_are_told(self):
        structure = self.build('.pdb')
        text = self.read('models.pdb').decode()
        het = {line[17:20] for line in text.splitlines() if line.startswith('HETATM')}
        self.assertEqual(het, {'QSM', 'QLA', 'UNL'})
        self.assertEqual(sum(line.startswith('LINK') for line in text.splitlines()), 4)
        self.assertIn('CONECT', text)
        self.assertEqual([r.name for r in structure[0]['A']], 'ALA CYS PRO HIS QSM GLY CYS LYS'.split())

    def test_mmcif_lists_components_and_bonds_to_metals(self):
        structure = self.build('.cif')
        block = gemmi.cif.read(self.path('models.cif')).sole_block()
        kinds = {row[0]: gemmi.cif.as_string(row[1]) for row in block.find('_chem_comp.', ['id', 'type'])}
        self.assertEqual(kinds['QLA'], 'non-polymer')
        self.assertEqual(kinds['QSM'], 'L-peptide linking')
        self.assertEqual({c.type for c in structure.connections}, {gemmi.ConnectionType.MetalC})
        self.assertEqual(list(block.find_values('_entity_poly.nstd_monomer')), ['yes'])

    def test_geometry_is_right_in_every_model(self):
        """The oxime is trans as the dictionary's torsion says, the acid's carbon has the hand of its sign, zinc has usual lengths."""
        for model in self.build('.cif'):
            def at(chain, number, name):
                return model[chain][str(number)][0].sole_atom(name).pos
            self.assertGreater(at('A', 5, 'CB').dist(at('A', 5, 'OE')), 3.3)  # cis: 2.7 Å
            c, a1, a2, a3 = (at('B', 1, n) for n in ('C8', 'C4', 'O3', 'C9'))
            self.assertGreater((a1 - c).dot((a2 - c).cross(a3 - c)), 0)
            self.assertAlmostEqual(at('A', 2, 'SG').dist(at('Z', 1, 'ZN')), 2.31, delta=0.03)
            self.assertAlmostEqual(at('A', 4, 'NE2').dist(at('Z', 1, 'ZN')), 2.03, delta=0.03)


if __name__ == '__main__':
    harness.main()

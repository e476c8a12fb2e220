"""Model files, summaries and reports of an invented ensemble, read back by readers that are not ours: gemmi and Biopython."""
import gzip
import json
import os
import subprocess
import sys
import tempfile
import unittest
import warnings

import gemmi
from Bio.PDB import MMCIFParser, PDBParser

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
MODELS = 3


class WrittenFiles(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls._folder = tempfile.TemporaryDirectory()
        cls.folder = cls._folder.name
        subprocess.run([os.path.join(BUILD, 'oracle', 'write_models'), cls.folder], check=True, timeout=60)
        with open(cls.path('atoms.tsv'), encoding='utf-8') as file:
            cls.meant = [line.rstrip('\n').split('\t') for line in file]

    @classmethod
    def tearDownClass(cls):
        cls._folder.cleanup()

    @classmethod
    def path(cls, name):
        return os.path.join(cls.folder, name)

    def read(self, name):
        with open(self.path(name), 'rb') as file:
            return file.read()

    def compare(self, found, spread_limit):
        self.assertEqual(len(found), len(self.meant))
        for got, meant in zip(found, self.meant):
            model, chain, number, insertion, residue, atom, element, x, y, z, spread = meant
            self.assertEqual(got[:7], (int(model), chain, int(number), insertion, residue, atom, element.upper()))
            for value, wanted in zip(got[7:10], (x, y, z)):
                self.assertAlmostEqual(value, float(wanted), delta=0.00055)  # rounding, and single precision
            self.assertAlmostEqual(got[10], min(float(spread), spread_limit), delta=0.006)

    def gemmi_atoms(self, name):
        structure = gemmi.read_structure(self.path(name))
        self.assertEqual(len(structure), MODELS)
        return [(number + 1, chain.name, residue.seqid.num, residue.seqid.icode, residue.name, atom.name, atom.element.name.upper(),
                 atom.pos.x, atom.pos.y, atom.pos.z, atom.b_iso)
                for number, model in enumerate(structure) for chain in model for residue in chain for atom in residue]

    def biopython_atoms(self, parser, name):
        with warnings.catch_warnings():
            warnings.simplefilter('error')
            structure = parser.get_structure('x', self.path(name))
        return [(number + 1, chain.id, residue.id[1], residue.id[2], residue.get_resname(), atom.get_id(), atom.element.upper(),
                 *map(float, atom.coord), atom.get_bfactor())
                for number, model in enumerate(structure) for chain in model for residue in chain for atom in residue]

    def test_pdb_by_gemmi(self):
        self.compare(self.gemmi_atoms('models.pdb'), 999.99)

    def test_pdb_by_biopython(self):
        self.compare(self.biopython_atoms(PDBParser(PERMISSIVE=False), 'models.pdb'), 999.99)

    def test_cif_by_gemmi(self):
        self.compare(self.gemmi_atoms('models.cif'), 1e9)

    def test_cif_by_biopython(self):
        self.compare(self.biopython_atoms(MMCIFParser(QUIET=False), 'models.cif'), 1e9)

    def test_links_sequences_and_cis_peptides_by_gemmi(self):
        for name in ('models.pdb', 'models.cif'):
            structure = gemmi.read_structure(self.path(name))
            self.assertEqual(len(structure.connections), 1, name)
            link = structure.connections[0]
            self.assertEqual(link.type, gemmi.ConnectionType.Disulf)
            self.assertEqual([(p.chain_name, p.res_id.seqid.num, p.atom_name) for p in (link.partner1, link.partner2)],
                             [('A', 2, 'SG'), ('B', 2, 'SG')])
            structure.setup_entities()
            sequences = sorted(tuple(e.full_sequence) for e in structure.entities if e.entity_type == gemmi.EntityType.Polymer)
            expected = {('GLY', 'CYS', 'PRO', 'LYS'), ('SER', 'ILE', 'TRP', 'HIS')}
            self.assertEqual(set(sequences), expected, name)

    def test_columns_of_the_pdb_format(self):
        """Version 3.3 of the format: 80 columns at most, TER after each polymer, serial numbers without gaps, ASCII."""
        text = self.read('models.pdb').decode('ascii')
        lines = text.splitlines()
        self.assertTrue(all(len(line) <= 80 for line in lines), max(lines, key=len))
        self.assertEqual(lines[-1], 'END')
        self.assertEqual(sum(line.startswith('TER') for line in lines), 3 * MODELS)
        model = text[text.index('\nMODEL '):text.index('\nENDMDL')].splitlines()[2:]
        self.assertEqual([int(line[6:11]) for line in model], list(range(1, len(model) + 1)))
        names = {line[12:16] for line in model if line.startswith(('ATOM', 'HETATM'))}
        self.assertTrue({' CA ', 'HG12', ' SG ', 'CL2 ', 'ZN  ', " O5'"} <= names, names)
        self.assertNotIn('-0.000', text)
        self.assertIn('DID NOT PASS', text)
        self.assertIn('18446744073709551615', text)

    def test_connections_join_the_right_serial_numbers(self):
        lines = self.read('models.pdb').decode().splitlines()
        atoms = {}
        for line in lines:
            if line.startswith('ENDMDL'):
                break
            if line.startswith(('ATOM', 'HETATM')):
                atoms[int(line[6:11])] = (line[21], line[22:26].strip(), line[12:16].strip())
        pairs = {(atoms[int(line[6:11])], atoms[int(line[11:16])]) for line in lines if line.startswith('CONECT')}
        one, two = ('A', '2', 'SG'), ('B', '2', 'SG')
        self.assertEqual(pairs, {(one, two), (two, one)})

    def test_cif_is_proper_cif(self):
        block = gemmi.cif.read(self.path('models.cif')).sole_block()
        self.assertEqual(gemmi.cif.as_string(block.find_value('_struct.title')), 'Invented; it\'s "nothing" 5 A wide')
        self.assertEqual(block.find_value('_trammel.trials'), '7')
        self.assertEqual(list(block.find_values('_trammel_model.passed')), ['yes', 'yes', 'no'])
        self.assertTrue(all(ord(c) < 128 for c in self.read('models.cif').decode()))

    def test_gzip_holds_the_same_and_no_time_or_name(self):
        """RFC 1952: bytes 4 to 7 are the time, bit 3 of byte 3 tells of a name."""
        for form in ('pdb', 'cif'):
            packed = self.read(f'models.{form}.gz')
            self.assertEqual(gzip.decompress(packed), self.read(f'models.{form}'))
            self.assertEqual((packed[3], packed[4:8]), (0, b'\0\0\0\0'))

    def test_summary(self):
        summary = json.loads(self.read('summary.json'))
        self.assertEqual((summary['seed'], summary['trials'], summary['passed'], summary['written']),
                         ('18446744073709551615', 7, 2, 3))
        self.assertEqual([m['passed'] for m in summary['models']], [True, True, False])
        self.assertEqual(summary['models'][1]['other_image_error'], 21.5)
        self.assertIsNone(summary['models'][0]['other_image_error'])
        self.assertEqual(summary['models'][0]['eigenvalues'], [9, 8, 7, 1, -2])
        self.assertEqual(summary['handedness'], {'as_embedded': 2, 'mirrored': 1, 'both_refined': 1, 'in_doubt': 1})
        self.assertEqual(summary['well_defined'], ['A:2', 'A:3'])
        self.assertEqual(summary['notes'][0]['line'], 3)

    def test_check(self):
        check = json.loads(self.read('check.json'))
        self.assertFalse(check['consistent'])
        chain = check['contradictions'][0]['chain']
        self.assertEqual([step['kind'] for step in chain], ['radius', 'restraint', 'restraint'])
        self.assertEqual([step['bound'] for step in chain], ['lower', 'upper', 'upper'])
        self.assertEqual((chain[0]['file'], chain[0]['id'], chain[1]['file'], chain[1]['line'], chain[1]['id']),
                         (None, None, 'invented.sheet', 5, 'r1'))
        # twice in the chain, each time by 64^(1/6) = 2 for every Å of the limit: 0.6 Å need 0.15 Å
        self.assertEqual(check['repair'], [{'list': 'noe', 'id': 'r1', 'bound': 'upper', 'loosen': 0.15}])

    def test_report_for_people(self):
        text = self.read('report.txt').decode()
        self.assertLessEqual(max(map(len, text.splitlines())), 100)
        for words in ('r1 of list noe', 'invented.sheet:5', 'A:2 to 3', 'starting points', 'flagged', 'upper limit of r1 raised by 0.150'):
            self.assertIn(words, text)


if __name__ == '__main__':
    outcome = unittest.main(exit=False, testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed = len(outcome.failures) + len(outcome.errors)
    print(f'{outcome.testsRun - failed - len(outcome.skipped)} passed, {failed} failed')
    sys.exit(failed != 0)

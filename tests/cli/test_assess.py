"""`trammel assess` from outside: statuses, what is said of atoms that do not match, files."""
import json
import os

import harness

SHEET = """sheet 1
sequence A 1 GLY SER VAL GLY
limit A:1:HA% A:3:H - 6 as near
limit A:2:HBx A:3:H - 5 as open
dihedral A:1:C A:2:N A:2:CA A:2:C -170 -40 as phi
"""


class Assess(harness.CommandTest):
    def setUp(self):
        super().setUp()
        self.sheet = self.write('set.sheet', SHEET)
        self.models = self.path('models.pdb')
        self.trammel('build', self.sheet, '-n', '3', '-o', self.models)

    def test_own_models_hold_in_both_formats(self):
        out, _ = self.trammel('assess', self.models, self.sheet, '--json', self.path('report.json'))
        self.assertIn('3 models', out)
        report = json.loads(self.read('report.json'))
        self.assertEqual(report['models'], 3)
        self.assertEqual({r['id']: len(r['violation']) for r in report['restraints']}, {'near': 3, 'open': 3, 'phi': 3})
        self.assertEqual(report['atoms'], {'in_problem': report['atoms']['in_problem'], 'missing': 0, 'not_in_problem': 0, 'residues_of_other_name': 0})
        self.assertEqual([g['wrong_handed'] for g in report['geometry']], [0, 0, 0])
        self.trammel('build', self.sheet, '-n', '1', '-o', self.path('one.cif.gz'))
        self.trammel('assess', self.path('one.cif.gz'), self.sheet)

    def test_a_violation_is_a_finding_and_the_limits_of_that_can_be_moved(self):
        tight = self.write('tight.sheet', SHEET + 'limit A:1:CA A:4:CA 2 3 as tight\n')
        out, _ = self.trammel('assess', self.models, tight, status=1)
        self.assertIn('tight', out)
        self.trammel('assess', self.models, tight, '--over', '100')
        self.trammel('assess', self.models, tight, '--over', 'x', status=2)

    def test_names_with_x_count_both_members_unless_they_are_left_open(self):
        def violation(*options):
            set_ = self.write('x.sheet', 'sheet 1\nsequence A 1 GLY SER VAL GLY\nlimit A:2:HBx A:2:HA 0.1 0.2 as x\n')
            self.trammel('assess', self.models, set_, '--json', self.path('x.json'), *options, status=1)
            return json.loads(self.read('x.json'))['restraints'][0]['violation'][0]
        self.assertLess(violation(), violation('--stereo', 'open'))  # a sum of two is nearer than one of them

    def test_other_chains_residues_and_atoms_are_told(self):
        renamed = self.write('renamed.sheet', SHEET.replace('A:', 'Z:').replace(' A ', ' Z '))
        out, _ = self.trammel('assess', self.models, renamed)
        self.assertIn('matched with one of another code', out)
        mutant = self.write('mutant.sheet', SHEET.replace('SER VAL', 'ALA VAL').replace('limit A:2:HBx A:3:H - 5 as open\n', ''))
        out, _ = self.trammel('assess', self.models, mutant)
        self.assertIn('of another name', out)
        lines = self.read('models.pdb').decode().splitlines(keepends=True)
        self.write('bare.pdb', ''.join(line for line in lines if line[:4] != 'ATOM' or line[76:78].strip() != 'H'))
        self.trammel('assess', self.path('bare.pdb'), self.sheet, '--json', self.path('bare.json'))
        report = json.loads(self.read('bare.json'))
        self.assertEqual([r['violation'] for r in report['restraints'] if r['id'] == 'near'], [[None] * 3])
        self.assertIsNotNone(next(r for r in report['restraints'] if r['id'] == 'phi')['violation'][0])

    def test_odd_inputs_are_refused(self):
        _, err = self.trammel('assess', status=2)
        _, err = self.trammel('assess', self.models, status=2)
        self.assertIn('stands alone', err)
        _, err = self.trammel('assess', self.sheet, self.sheet, status=2)
        _, err = self.trammel('assess', self.models, self.path('none.sheet'), status=2)
        beads = self.write('beads.sheet', 'sheet 1\natom P bead\natom Q bead\nlimit P Q 1 2\n')
        _, err = self.trammel('assess', self.models, beads, status=2)
        self.assertIn('none of its atoms', err)
        _, err = self.trammel('assess', self.models, self.sheet, '--json', os.path.join(self.folder, 'no', 'file.json'), status=3)

    def test_standard_output_can_be_json_alone(self):
        out, _ = self.trammel('assess', self.models, self.sheet, '--json', '-')
        self.assertEqual(json.loads(out)['models'], 3)


harness.main()

"""`trammel convert` from outside: formats by name and by option, statuses, refusals."""
import gzip
import json

import harness

SHEET = 'sheet 1\nsequence A 1 GLY SER GLY\nlimit A:1:HA% A:2:HBx 1.8 5 as one\n'


class Convert(harness.CommandTest):
    def setUp(self):
        super().setUp()
        self.sheet = self.write('set.sheet', SHEET)

    def test_the_format_follows_the_name_or_the_option(self):
        self.trammel('convert', self.sheet, '-o', self.path('out.nef'))
        self.assertIn(b'_nef_distance_restraint.restraint_id', self.read('out.nef'))
        self.trammel('convert', self.sheet, '-o', self.path('out.str.gz'))
        self.assertIn(b'_Gen_dist_constraint.ID', gzip.decompress(self.read('out.str.gz')))
        out, _ = self.trammel('convert', self.path('out.nef'), '-o', '-', '--format', 'sheet')
        self.assertTrue(out.startswith('sheet 1\n'))
        self.assertIn('limit A:1:HA% A:2:HBx 1.8 5 as one', out)

    def test_what_is_lost_is_a_finding_only_when_that_is_asked(self):
        _, err = self.trammel('convert', self.sheet, '-o', self.path('out.str'))
        self.assertIn('not held by this format: 1 names with x and y', err)
        self.trammel('convert', self.sheet, '-o', self.path('strict.str'), '--strict', status=1)
        self.trammel('convert', self.sheet, '-o', self.path('strict.nef'), '--strict')

    def test_the_same_input_gives_the_same_bytes(self):
        self.trammel('convert', self.sheet, '-o', self.path('one.nef'))
        self.trammel('convert', self.sheet, '-o', self.path('two.nef'))
        self.assertEqual(self.read('one.nef'), self.read('two.nef'))

    def test_what_was_converted_can_be_held_against_its_source(self):
        self.trammel('convert', self.sheet, '-o', self.path('out.str'))
        out, _ = self.trammel('check', self.sheet, '--against', self.path('out.str'), '--json', self.path('report.json'))
        self.assertIn('1 distances: the same in both', out)
        against = json.loads(self.read('report.json'))['against']
        self.assertEqual((against['distances']['counts']['same'], against['distances']['differences']), (1, []))
        other = self.write('other.sheet', SHEET.replace('1.8 5', '1.8 6'))
        out, _ = self.trammel('check', self.sheet, '--against', other)
        self.assertIn('the same atoms, other limits', out)
        self.trammel('check', self.sheet, '--against', self.path('none'), status=2)

    def test_refusals(self):
        self.trammel('convert', status=2)
        self.trammel('convert', self.sheet, status=2)
        _, err = self.trammel('convert', self.sheet, '-o', self.path('out.pdb'), status=2)
        self.assertIn('does not tell the format', err)
        self.trammel('convert', self.sheet, '-o', self.path('out.nef'), '--format', 'sheet', status=2)
        self.trammel('convert', self.sheet, '-o', self.path('out.nef'), '--format', 'pdb', status=2)
        self.trammel('convert', self.sheet, '-o', self.sheet, status=2)
        bad = self.write('bad.sheet', SHEET + 'limit A:1:HA A:2:H 3 2\n')
        _, err = self.trammel('convert', bad, '-o', self.path('bad.nef'), status=2)
        self.assertIn('bad.sheet:4', err)


harness.main()

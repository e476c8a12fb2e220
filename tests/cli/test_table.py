"""Tables as restraint input: options, messages, reports."""
import os

import harness

VEILIN = os.path.join(harness.HERE, '..', '..', 'restraints', 'veilin.nef')
COLUMNS = 'chain_1 residue_1 atom_1 chain_2 residue_2 atom_2 lower upper'
RING = 'sheet 1\natom P bead\natom Q bead\natom R bead\nlimit P Q 1 3\nlimit Q R 1 3\n'


class Tables(harness.CommandTest):
    def setUp(self):
        super().setUp()
        self.write('ring.sheet', RING)

    def usage(self, *arguments, says):
        out, err = self.trammel(*arguments, status=2)
        self.assertEqual(out, '')
        self.assertIn(says, err)

    def test_a_table_says_what_a_sheet_says(self):
        self.write('far.csv', 'P,R,4,5\n')
        self.write('whole.sheet', RING + 'limit P R 4 5\n')
        told = self.trammel('bounds', 'ring.sheet', '--table', 'far.csv', '--columns', 'atom_1 atom_2 lower upper')[0]
        self.assertEqual(told, self.trammel('bounds', 'whole.sheet')[0])
        self.assertNotEqual(told, self.trammel('bounds', 'ring.sheet')[0])
        self.assertEqual(self.trammel('bounds', 'ring.sheet', '--table', '-', '--columns', 'atom_1 atom_2 lower upper', '--table-form',
                                      'nm decimal-comma', stdin=b'P;R;0,4;0,5\n')[0], told)

    def test_each_table_has_its_own_options(self):
        self.write('one.csv', 'P,R,4,5\n')
        self.write('two.txt', 'x\ty\nQ\t2.5\n')
        out, _ = self.trammel('check', 'ring.sheet', '--table', 'one.csv', '--columns', 'atom_1 atom_2 lower upper', '--table', 'two.txt',
                              '--columns', 'atom_1@x upper@y atom_2=R')
        self.assertIn('4 distance', out)

    def test_a_contradiction_names_the_table_s_row(self):
        self.write('far.csv', '# a heading\nP,R,9,11\n')
        out, _ = self.trammel('check', 'ring.sheet', '--table', 'far.csv', '--columns', 'atom_1 atom_2 lower upper', status=1)
        self.assertIn('far.csv:2', out)

    def test_usage(self):
        far = ['--table', self.write('far.csv', 'P,R,4,5\n'), '--columns']
        self.usage('check', 'ring.sheet', '--table', 'far.csv', says='needs --columns')
        self.usage('check', 'ring.sheet', '--columns', 'atom_1', says='there is none')
        self.usage('check', 'ring.sheet', '--table-form', 'nm', says='there is none')
        self.usage('check', '--table', 'far.csv', '--columns', 'atom_1 atom_2 lower upper', says='No input')
        self.usage('check', '-', '--table', '-', '--columns', 'atom_1 atom_2 lower upper', says='only once')
        self.usage('check', 'ring.sheet', *far, 'a', '--columns', 'b', says='twice')
        self.usage('check', 'ring.sheet', *far, 'atom_1 atom_2 lower uper', says='far.csv: word 4 of its columns')
        self.usage('check', 'ring.sheet', '--table', 'no.csv', '--columns', 'atom_1 atom_2 lower upper', says='no.csv')
        self.usage('bounds', 'ring.sheet', *far, 'atom_1 atom_2 lower upper', '-o', 'far.csv', says='one of the inputs')
        self.assertEqual(self.read('far.csv'), b'P,R,4,5\n')

    def test_a_bad_row_has_a_place(self):
        self.write('far.csv', 'a,b,lo,up\nP,R,4,5\nP,R,4,5x\n')
        _, err = self.trammel('check', 'ring.sheet', '--table', 'far.csv', '--columns', 'atom_1 atom_2 lower upper', status=2)
        self.assertTrue(err.startswith("trammel: far.csv:3:7: upper: found '5x' where an upper limit"), err)

    def test_old_names_are_told_by_check_and_by_build(self):
        self.write('chain.sheet', 'sheet 1\nsequence A 1 LYS GLY\n')
        self.write('old.txt', 'A 1 HB1 A 2 HN - 5.0\n')
        read = ['chain.sheet', '--table', 'old.txt', '--columns', COLUMNS]
        self.assertIn('no such atom in LYS', self.trammel('check', *read)[0])
        told = "'hydrogens-1-2': 2 of 2 atom names changed"
        out, _ = self.trammel('check', *read, '--old-names', 'hydrogens-1-2')
        self.assertIn(told, ' '.join(out.split()))
        out, _ = self.trammel('build', *read, '--old-names', 'hydrogens-1-2', '-n', '1', '-o', 'out.pdb', '--summary', 'out.json')
        self.assertIn(told, ' '.join(out.split()))
        self.assertIn(told.encode(), self.read('out.json'))
        self.write('mine.names', 'old-names 1\nLYS HB1 HB3\n* HN H\n')
        out, _ = self.trammel('check', *read, '--old-names', 'mine.names')
        self.assertIn("'mine.names': 2 of 2", ' '.join(out.split()))
        self.usage('check', *read, '--old-names', 'hydrogens', says='the built-in mappings are')


if __name__ == '__main__':
    harness.main()

"""Inputs from outside: standard input, gzip, several files, and everything that is wrong with a file."""
import gzip
import os
import random

import harness
from harness import CONTRADICTED, FIVE_RING, PEPTIDE


def text_of(path):
    with open(path, encoding='utf-8') as file:
        return file.read()


class GoodInputs(harness.CommandTest):
    def test_standard_input_file_and_gzip_give_the_same_table(self):
        table, _ = self.trammel('bounds', FIVE_RING)
        self.assertEqual(self.trammel('bounds', '-', stdin=text_of(FIVE_RING).encode())[0], table)
        self.write('ring.gz', gzip.compress(text_of(FIVE_RING).encode()))
        self.assertEqual(self.trammel('bounds', 'ring.gz')[0], table)
        self.assertEqual(self.trammel('bounds', '-', stdin=gzip.compress(text_of(FIVE_RING).encode()))[0], table)

    def test_a_file_s_name_tells_nothing(self):
        table, _ = self.trammel('bounds', FIVE_RING)
        self.write('ring.pdb', text_of(FIVE_RING))
        self.assertEqual(self.trammel('bounds', 'ring.pdb')[0], table)

    def test_line_ends_of_other_systems(self):
        table, _ = self.trammel('bounds', FIVE_RING)
        self.write('dos.sheet', text_of(FIVE_RING).replace('\n', '\r\n'))
        self.assertEqual(self.trammel('bounds', 'dos.sheet')[0], table)

    def test_several_files_are_one_problem(self):
        lines = text_of(FIVE_RING).splitlines(True)
        limits = [line for line in lines if line.startswith('limit')]
        self.write('molecule.sheet', ''.join(line for line in lines if not line.startswith('limit')))
        self.write('limits.sheet', 'sheet 1\n' + ''.join(limits))
        self.assertEqual(self.trammel('bounds', 'molecule.sheet', 'limits.sheet')[0], self.trammel('bounds', FIVE_RING)[0])


class BadInputs(harness.CommandTest):
    def bad(self, content, place='', says=''):
        """Status 2; the message begins with file, line and column, as far as given."""
        self.write('bad.sheet', content)
        out, err = self.trammel('check', 'bad.sheet', status=2, timeout=20)
        self.assertEqual(out, '')
        self.assertTrue(err.startswith(f'trammel: bad.sheet{place}'), err)
        self.assertIn(says, err)
        self.assertLess(len(err), 2000)
        return err

    def test_a_missing_file(self):
        out, err = self.trammel('check', 'nowhere.sheet', status=2)
        self.assertEqual(out, '')
        self.assertIn('nowhere.sheet', err)

    def test_a_folder(self):
        _, err = self.trammel('check', '.', status=2)
        self.assertIn('.', err)

    def test_an_empty_file(self):
        self.bad(b'')
        self.bad(b'\n\n   \n')
        self.trammel('check', '-', stdin=b'', status=2)

    def test_noise(self):
        generator = random.Random(5)
        for length in (1, 10, 1000, 100000):
            self.bad(bytes(generator.randrange(256) for _ in range(length)))

    def test_null_bytes(self):
        self.bad(b'\0' * 5000)
        self.bad(b'sheet 1\natom A\0B bead\n')

    def test_a_line_of_a_megabyte(self):
        self.bad(b'x' * 1000000)
        self.bad(b'sheet 1\natom ' + b'A' * 1000000 + b' bead\n')
        self.bad(b'sheet 1\ntitle "' + b'A' * 1000000)

    def test_a_truncated_or_corrupt_gzip_file(self):
        packed = gzip.compress(text_of(PEPTIDE).encode() * 50)
        for content in (packed[:len(packed) // 2], packed[:12], packed[:len(packed) // 2] + b'\xff' * 100 + packed[len(packed) // 2:]):
            self.write('bad.gz', content)
            _, err = self.trammel('check', 'bad.gz', status=2)
            self.assertIn('bad.gz', err)

    def test_an_unknown_statement(self):
        self.bad('sheet 1\natom A bead\nlimmit A A 1 2\n', ':3:1: ', 'limmit')

    def test_another_version_of_the_sheet(self):
        self.bad('sheet 2\natom A bead\n', ':1:7: ', '2')

    def test_numbers(self):
        head = 'sheet 1\natom A bead\natom B bead\n'
        for number in ('x', 'nan', 'inf', '1e999', '-1', '1.0.0', '0x4', '3,5', '--'):
            self.bad(f'{head}limit A B {number} 4.0\n', ':4:11: ')
        self.bad(f'{head}limit A B 4.0 3.0\n', ':4:')
        self.bad(f'{head}limit A B 4.0\n', ':4:')
        self.bad(f'{head}limit A B 3.0 4.0 weight -1\n', ':4:')
        self.bad(f'{head}limit A B 3.0 4.0 weight nan\n', ':4:')

    def test_atoms_twice(self):
        self.bad('sheet 1\natom A bead\natom A bead\n', ':3:')

    def test_an_unknown_residue(self):
        self.bad('sheet 1\nsequence A 1 ALA QQQ GLY\n', ':2:18: ', 'QQQ')

    def test_an_open_quote(self):
        self.bad('sheet 1\ntitle "never closed\n', ':2:')

    def test_a_message_shows_no_control_characters(self):
        err = self.bad(b'sheet 1\n\x1b[31mred 1 2\n')
        self.assertNotIn('\x1b', err)

    def test_broken_exchange_files(self):
        for content in ('data_x\nloop_\n', 'data_x\nloop_ _a.b\n', "data_x\nsave_nef_sequence\n_nef_sequence.sf_category 'open\n",
                        'data_x\n;text\nnever ended', 'data_', 'save_\n', 'data_x\nloop_ _nef_sequence.index _nef_sequence.chain_code 1 A 2\n'):
            self.write('bad.nef', content)
            out, err = self.trammel('check', 'bad.nef', status=2, timeout=20)
            self.assertIn('bad.nef', err)

    def test_every_prefix_of_a_good_sheet_ends_well(self):
        text = text_of(PEPTIDE)
        step = 40 if harness.SLOWER == 1 else 200
        for length in range(0, len(text), step):
            self.write('part.sheet', text[:length])
            import subprocess
            done = subprocess.run([harness.PROGRAM, 'check', 'part.sheet'], cwd=self.folder, stdin=subprocess.DEVNULL,
                                  capture_output=True, timeout=60, check=False)
            self.assertIn(done.returncode, (0, 1, 2), (length, done.stderr))


class Unmapped(harness.CommandTest):
    SHEET = 'sheet 1\nsequence A 1 ALA SER GLY\nlimit A:1:HA A:2:HB1 1.8 5.0 as old\nlimit A:1:HA A:3:H 1.8 6.0 as good\n'

    def test_restraints_on_unknown_atoms_are_counted_and_listed(self):
        self.write('set.sheet', self.SHEET)
        out, _ = self.trammel('check', 'set.sheet', '--json', 'found.json')
        self.assertIn('HB1', out)
        import json
        found = json.loads(self.read('found.json'))
        self.assertEqual((found['counts']['unmapped'], found['counts']['distance']), (1, 1))

    def test_with_strict_they_are_an_error_that_names_the_nearest(self):
        self.write('set.sheet', self.SHEET)
        for command in (['check'], ['bounds'], ['build', '-o', 'm.pdb']):
            _, err = self.trammel(*command, '--strict', 'set.sheet', status=2)
            self.assertIn('set.sheet:3:', err)
            self.assertIn('HB2', err)
        self.assertFalse(os.path.exists(self.path('m.pdb')))


class Contradicted(harness.CommandTest):
    def test_check_proves_it(self):
        import json
        out, _ = self.trammel('check', CONTRADICTED, '--json', 'found.json', status=1)
        self.assertIn('reach', out)
        found = json.loads(self.read('found.json'))
        self.assertFalse(found['consistent'])
        self.assertEqual(len(found['contradictions']), 1)
        proof = found['contradictions'][0]
        self.assertEqual((proof['level'], proof['conditional'], round(proof['excess'], 6)), ('triangle', False, 0.6))
        steps = [(step['bound'], step['value'], step['id'], step['line'], step['kind']) for step in proof['chain']]
        self.assertEqual(steps[0], ('lower', 9.0, 'reach', 8, 'restraint'))
        self.assertEqual(sorted(steps[1:]), [('upper', 4.2, 'side1', 6, 'restraint'), ('upper', 4.2, 'side2', 7, 'restraint')])
        atoms = [(step['atom_1'], step['atom_2']) for step in proof['chain']]
        for here, there in zip(atoms, atoms[1:] + atoms[:1]):
            self.assertEqual(here[1], there[0])
        self.assertTrue(found['repair'])

    def test_bounds_says_so_and_strict_writes_nothing(self):
        out, err = self.trammel('bounds', CONTRADICTED, status=1)
        self.assertEqual(len(out.splitlines()), 4)
        self.assertIn('contradict', err)
        out, _ = self.trammel('bounds', '--strict', CONTRADICTED, status=1)
        self.assertEqual(out, '')

    def test_build_goes_on_and_strict_does_not(self):
        self.trammel('build', CONTRADICTED, '-n', 2, '-o', 'm.pdb', status=1)
        self.assertTrue(os.path.exists(self.path('m.pdb')))
        self.trammel('build', CONTRADICTED, '-n', 2, '-o', 'strict.pdb', '--strict', status=1)
        self.assertFalse(os.path.exists(self.path('strict.pdb')))


if __name__ == '__main__':
    harness.main()

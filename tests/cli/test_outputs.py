"""What is written: tables, models, summaries; whole or not at all; the same bytes every time; full disks and signals."""
import gzip
import json
import math
import os
import re
import shutil
import signal
import stat
import subprocess
import time

import harness
from harness import FIVE_RING, PEPTIDE, PROGRAM


class Bounds(harness.CommandTest):
    def test_the_table_has_every_pair_in_atom_order(self):
        out, err = self.trammel('bounds', FIVE_RING)
        self.assertEqual(err, '')
        lines = [line.split('\t') for line in out.splitlines()]
        names = ['R1', 'R2', 'R3', 'R4', 'R5', 'CAP']
        self.assertEqual(lines[0], ['atom_1', 'atom_2', 'lower', 'upper'])
        self.assertEqual([tuple(line[:2]) for line in lines[1:]], [(a, b) for i, a in enumerate(names) for b in names[i + 1:]])
        for line in lines[1:]:
            self.assertRegex(line[2], r'^\d+\.\d{4}$')
            self.assertRegex(line[3], r'^\d+\.\d{4}$|^-$')

    def test_limits_are_the_triangle_closure(self):
        """Against a plain Floyd-Warshall closure (Floyd, Comm. ACM 5 (1962) 345) and Dress & Havel's bound, here in Python."""
        given = {}
        for line in open(FIVE_RING, encoding='utf-8'):
            words = line.split()
            if words[:1] == ['limit']:
                given[frozenset(words[1:3])] = (float(words[3]), math.inf if words[4] == '-' else float(words[4]))
        names = ['R1', 'R2', 'R3', 'R4', 'R5', 'CAP']
        upper = {(a, b): 0.0 if a == b else given.get(frozenset((a, b)), (0, math.inf))[1] for a in names for b in names}
        for k in names:
            for a in names:
                for b in names:
                    upper[a, b] = min(upper[a, b], upper[a, k] + upper[k, b])
        first = {(a, b): given.get(frozenset((a, b)), (0, 0))[0] for a in names for b in names}
        rows = self.trammel('bounds', FIVE_RING)[0].splitlines()[1:]
        for a, b, low, high in (row.split('\t') for row in rows):
            low_expected = max([0.0] + [first[k, l] - upper[a, k] - upper[l, b] for k in names for l in names if k != l])
            self.assertAlmostEqual(float(high), upper[a, b], delta=2e-4)
            self.assertAlmostEqual(float(low), low_expected, delta=2e-4)

    def test_no_upper_limit_is_a_dash(self):
        self.write('two.sheet', 'sheet 1\natom A bead\natom B bead\nlimit A B 3 -\n')
        self.assertEqual(self.trammel('bounds', 'two.sheet')[0], 'atom_1\tatom_2\tlower\tupper\nA\tB\t3.0000\t-\n')

    def test_to_a_file_and_compressed(self):
        table, _ = self.trammel('bounds', FIVE_RING)
        self.assertEqual(self.trammel('bounds', FIVE_RING, '-o', 'table.txt')[0], '')
        self.trammel('bounds', FIVE_RING, '-o', 'table.txt.gz')
        self.assertEqual(self.read('table.txt').decode(), table)
        self.assertEqual(gzip.decompress(self.read('table.txt.gz')).decode(), table)


class Models(harness.CommandTest):
    def build(self, *arguments, status=0):
        return self.trammel('build', PEPTIDE, '-n', 2, '--trials', 6, *arguments, status=status)

    def test_same_seed_same_bytes_with_any_number_of_threads(self):
        for threads, name in ((1, 'one'), (2, 'two'), (3, 'three')):
            self.build('-t', threads, '-o', f'{name}.cif', '--summary', f'{name}.json')
        self.assertEqual(self.read('one.cif'), self.read('two.cif'))
        self.assertEqual(self.read('one.cif'), self.read('three.cif'))
        models = [json.loads(self.read(f'{name}.json'))['models'] for name in ('one', 'two', 'three')]
        self.assertEqual(models[0], models[1])
        self.assertEqual(models[0], models[2])

    def test_another_seed_other_bytes(self):
        self.build('-o', 'one.pdb')
        self.build('-o', 'two.pdb', '--seed', '18446744073709551615')
        self.assertNotEqual(self.read('one.pdb'), self.read('two.pdb'))

    def test_files_standard_output_and_gzip_agree(self):
        for form in ('pdb', 'cif'):
            out, _ = self.build('-o', '-', '--format', form)
            self.build('-o', f'm.{form}')
            self.build('-o', f'm.{form}.gz')
            self.assertEqual(self.read(f'm.{form}').decode(), out)
            self.assertEqual(gzip.decompress(self.read(f'm.{form}.gz')).decode(), out)
            self.build('-o', f'n.{form}.gz')
            self.assertEqual(self.read(f'm.{form}.gz'), self.read(f'n.{form}.gz'))

    def test_no_path_time_or_thread_count_in_models(self):
        self.build('-o', 'here-it-is.pdb')
        text = self.read('here-it-is.pdb').decode()
        self.assertNotIn('here-it-is', text)
        self.assertNotIn(self.folder, text)
        self.assertNotIn(time.strftime('%Y-'), text)

    def test_summary_holds_what_it_should(self):
        self.build('-o', 'm.pdb', '--summary', 's.json', '--seed', 9)
        summary = json.loads(self.read('s.json'))
        self.assertEqual((summary['program'], summary['seed'], summary['written']), ('trammel', 9, 2))
        self.assertEqual(summary['problem']['distance_restraints'], 6)
        self.assertEqual(summary['problem']['dihedral_restraints'], 7)
        self.assertEqual(summary['problem']['unmapped'], 0)
        self.assertEqual(set(summary['timing_s']), {'read', 'smooth', 'metrize', 'embed', 'refine', 'write', 'total'})
        self.assertGreaterEqual(summary['trials'], 3)
        self.assertLessEqual(summary['trials'], 6)
        for model in summary['models']:
            self.assertGreaterEqual(set(model), {'model', 'trial', 'error', 'passed', 'mirrored', 'distance', 'dihedral',
                                                 'eigenvalues'})
            self.assertEqual([item['by'] for item in model['distance']['above']], [0.1, 0.2, 0.5])
        self.assertEqual(summary['models'], sorted(summary['models'], key=lambda m: (not m['passed'], m['error'])))

    def test_selecting_the_first_makes_no_more_trials_than_needed(self):
        self.build('-o', 'm.pdb', '--summary', 's.json', '--select', 'first')
        summary = json.loads(self.read('s.json'))
        self.assertEqual(sorted(m['trial'] for m in summary['models'])[-1], summary['trials'])

    def test_models_obey_the_limits_by_their_own_coordinates(self):
        """Distances from the written file's columns (PDB format 3.3), not from the program's own figures."""
        self.trammel('build', FIVE_RING, '-n', 3, '-o', 'm.pdb')
        text = self.read('m.pdb').decode()
        models = re.findall(r'^MODEL.*?^ENDMDL', text, re.S | re.M)
        self.assertEqual(len(models), 3)
        limits = [line.split() for line in open(FIVE_RING, encoding='utf-8') if line.startswith('limit')]
        for model in models:
            xyz = {line[12:16].strip(): [float(line[i:i + 8]) for i in (30, 38, 46)] for line in model.splitlines()
                   if line.startswith(('ATOM', 'HETATM'))}
            for _, a, b, low, high, *_ in limits:
                distance = math.dist(xyz[a], xyz[b])
                self.assertGreaterEqual(distance, float(low) - 0.1)
                self.assertLessEqual(distance, math.inf if high == '-' else float(high) + 0.1)

    def test_other_options_work(self):
        self.build('-o', 'a.pdb', '--dimensions', 4)
        self.build('-o', 'b.pdb', '--roots', 4)
        self.build('-o', 'c.pdb', '--effort', 0.5)

    def test_progress_only_when_asked_for(self):
        self.assertEqual(self.build('-o', 'm.pdb')[1], '')
        self.assertNotEqual(self.build('-o', 'm.pdb', '--progress')[1], '')

    def test_an_existing_file_is_replaced_and_nothing_else_is_left(self):
        self.write('m.pdb', 'old')
        self.build('-o', 'm.pdb')
        self.assertTrue(self.read('m.pdb').startswith((b'HEADER', b'TITLE', b'REMARK', b'MODEL')))
        self.assertEqual(os.listdir(self.folder), ['m.pdb'])


class Failures(harness.CommandTest):
    def test_a_full_disk_on_standard_output(self):
        for arguments in (['--help'], ['--version'], ['build', '--help'], ['check', FIVE_RING], ['bounds', FIVE_RING],
                          ['build', FIVE_RING, '-n', '1', '-o', '-', '--format', 'pdb'], ['build', FIVE_RING, '-n', '1', '-o', 'm.pdb']):
            with open('/dev/full', 'wb') as full:
                _, err = self.trammel(*arguments, status=3, stdout=full)
            self.assertIn('trammel: ', err)

    def test_devices_and_pipes_are_written_to_and_stay_what_they_are(self):
        os.mkfifo(self.path('pipe'))
        cat = self.start(['cat', 'pipe'])
        self.trammel('bounds', FIVE_RING, '-o', 'pipe')
        self.assertEqual(cat.communicate(timeout=20)[0].decode(), self.trammel('bounds', FIVE_RING)[0])
        self.assertTrue(stat.S_ISFIFO(os.stat(self.path('pipe')).st_mode))

    def test_a_full_device_as_the_output(self):
        os.symlink('/dev/full', self.path('full'))
        self.trammel('bounds', FIVE_RING, '-o', 'full', status=3)
        self.assertTrue(os.path.islink(self.path('full')))
        self.assertTrue(stat.S_ISCHR(os.stat('/dev/full').st_mode))

    def test_a_folder_that_is_not_there_or_takes_nothing(self):
        for place in ('nowhere/m.pdb', '/proc/m.pdb', FIVE_RING + '/m.pdb'):
            _, err = self.trammel('build', FIVE_RING, '-n', 1, '-o', place, status=3)
            self.assertIn(place, err)
            self.trammel('check', FIVE_RING, '--json', place, status=3)

    def test_a_folder_without_permission(self):
        """As a user who may not write there; an administrator takes the part of one who may not."""
        program, someone = self.path('program'), {'user': 65534, 'group': 65534} if os.geteuid() == 0 else {}
        shutil.copy(PROGRAM, program)
        sheet = self.write('set.sheet', open(FIVE_RING, encoding='utf-8').read())
        os.chmod(self.folder, 0o555)
        done = subprocess.run([program, 'build', sheet, '-n', '1', '-o', 'm.pdb'], cwd=self.folder, capture_output=True,
                              timeout=60 * harness.SLOWER, check=False, **someone)
        os.chmod(self.folder, 0o755)
        self.assertEqual(done.returncode, 3, done.stderr)
        self.assertIn(b'm.pdb', done.stderr)

    def test_a_reader_that_goes_away(self):
        process = self.start([PROGRAM, 'bounds', PEPTIDE])
        process.stdout.close()
        process.stdout = None
        err = process.communicate(timeout=60 * harness.SLOWER)[1].decode()
        self.assertEqual(process.returncode, 3)
        self.assertIn('trammel: ', err)

    def test_a_format_that_cannot_hold_the_molecule(self):
        """PDB format 3.3 has one column for the chain."""
        self.write('long.sheet', 'sheet 1\nsequence LONG 1 ALA GLY\n')
        _, err = self.trammel('build', 'long.sheet', '-n', 1, '-o', 'm.pdb', status=2)
        self.assertIn('cif', err.lower())
        self.assertEqual(os.listdir(self.folder), ['long.sheet'])
        self.trammel('build', 'long.sheet', '-n', 1, '-o', 'm.cif')


class Signals(harness.CommandTest):
    def stopped(self, number, arguments):
        """Send a signal in the middle of the work: 128 + signal, and no file but the input."""
        residues = ' '.join(['ALA', 'LEU', 'LYS', 'SER', 'PHE'] * 20)
        self.write('long.sheet', f'sheet 1\nsequence A 1 {residues}\n')
        process = self.start([PROGRAM, *arguments])
        time.sleep(2)
        self.assertIsNone(process.poll(), 'it ended before the signal')
        start = time.time()
        process.send_signal(number)
        out, err = process.communicate(timeout=60 * harness.SLOWER)
        self.assertEqual(process.returncode, 128 + number, err)
        self.assertLess(time.time() - start, 5 * harness.SLOWER)
        self.assertEqual(out, b'')
        self.assertEqual(os.listdir(self.folder), ['long.sheet'])

    def test_interrupt_while_building(self):
        self.stopped(signal.SIGINT, ['build', 'long.sheet', '-n', '500', '--effort', '20', '-o', 'm.pdb', '--summary', 's.json'])

    def test_terminate_while_building(self):
        self.stopped(signal.SIGTERM, ['build', 'long.sheet', '-n', '500', '--effort', '20', '-o', 'm.cif.gz'])

    def test_interrupt_while_waiting_for_standard_input(self):
        process = self.start([PROGRAM, 'check', '-'], stdin=subprocess.PIPE)
        time.sleep(0.5 * harness.SLOWER)
        process.send_signal(signal.SIGINT)
        self.assertEqual(process.wait(timeout=20), 130)


if __name__ == '__main__':
    harness.main()

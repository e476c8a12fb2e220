"""Known structures, there and back: limits derived from PDB entries (open data) through `derive`, models through `build`, compared
with the entries by SciPy's superposition (scipy.spatial.transform.Rotation.align_vectors).

1ADZ is an NMR ensemble with hydrogens; 1ZAA (its first finger) and 1SP1 are zinc fingers. Distances tell nothing of the
hand: it is the chemistry's, so models must be near the entry and far from its mirror image.
"""
import gzip
import os
import subprocess
import sys
import tempfile
import unittest

import gemmi
import numpy
from scipy.spatial.transform import Rotation

PROGRAM = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'trammel')
ENSEMBLES, FINGERS = '/usr/share/doc/theseus/examples', '/usr/share/doc/mustang-testdata/examples/pdbs'

# Entry, options of derive, and the largest backbone r.m.s.d. (N, CA, C; Å) of the best model of some trials.
PROTONS = ('--atoms', 'hydrogens', '--cutoff', '6', '--error', '1', '--keep', '0.3')
CASES = {'1adz': (f'{ENSEMBLES}/1adz.pdb.gz', PROTONS, 2, 1.5),
         '1zaa, a tenth of all heavy pairs': (f'{FINGERS}/1zaa1.pdb', ('--cutoff', '10', '--keep', '0.1'), 4, 0.6),
         '1zaa, near heavy pairs': (f'{FINGERS}/1zaa1.pdb', ('--cutoff', '6', '--error', '1', '--keep', '0.3'), 4, 1.0),
         '1sp1, near heavy pairs': (f'{FINGERS}/1sp1.pdb', ('--cutoff', '6', '--error', '1', '--keep', '0.3'), 4, 1.2)}


def backbone(model):
    return {(number, atom.name): atom.pos.tolist() for number, residue in enumerate(model[0]) for atom in residue
            if atom.name in ('N', 'CA', 'C')}


def read(path):
    with (gzip.open(path, 'rt') if path.endswith('.gz') else open(path, encoding='utf-8')) as file:
        return gemmi.read_pdb_string(file.read())


def rmsd(one, other):
    one, other = one - one.mean(axis=0), other - other.mean(axis=0)
    return Rotation.align_vectors(other, one)[1] / len(one) ** 0.5


class RoundTrip(unittest.TestCase):
    def setUp(self):
        self._folder = tempfile.TemporaryDirectory()
        self.folder = self._folder.name

    def tearDown(self):
        self._folder.cleanup()

    def path(self, name):
        return os.path.join(self.folder, name)

    def run_program(self, *arguments, statuses=(0,)):
        done = subprocess.run([PROGRAM, *arguments], capture_output=True, text=True, timeout=300, check=False)
        self.assertIn(done.returncode, statuses, done.stderr)
        return done.stdout

    def test_models_come_back_to_the_entry_and_not_to_its_mirror_image(self):
        for name, (entry, options, trials, limit) in CASES.items():
            if not os.path.exists(entry):
                continue
            with self.subTest(name):
                sheet, models = self.path('limits.sheet'), self.path('models.pdb')
                self.run_program('derive', entry, '--model', '1', *options, '-o', sheet)
                self.run_program('build', sheet, '-n', '1', '--trials', str(trials), '-o', models, statuses=(0, 1))
                known, built = backbone(read(entry)[0]), backbone(read(models)[0])
                self.assertGreater(len(known), 60)
                self.assertEqual(set(known) - set(built), set())
                one = numpy.array([known[key] for key in known])
                other = numpy.array([built[key] for key in known])
                near, mirrored = rmsd(one, other), rmsd(one * [1, 1, -1], other)
                print(f'{name}: best of {trials} trials at {near:.2f} Å, from the mirror image {mirrored:.2f} Å')
                self.assertLessEqual(near, limit)
                self.assertGreater(mirrored, 2.5)

    def test_one_thread_and_two_write_the_same_bytes(self):
        sheet = self.path('limits.sheet')
        entry = f'{FINGERS}/1zaa1.pdb'
        if not os.path.exists(entry):
            self.skipTest('no zinc fingers on this machine')
        self.run_program('derive', entry, *CASES['1zaa, a tenth of all heavy pairs'][1], '-o', sheet)
        written = []
        for threads in '12':
            models = self.path(f'models-{threads}.pdb')
            self.run_program('build', sheet, '-n', '2', '--trials', '3', '--effort', '0.1', '--threads', threads, '-o', models, statuses=(0, 1))
            with open(models, 'rb') as file:
                written.append(file.read())
        self.assertEqual(written[0], written[1])


def main():
    if not any(os.path.exists(case[0]) for case in CASES.values()):
        print('no PDB entries on this machine')
        sys.exit(77)
    outcome = unittest.main(exit=False, argv=sys.argv[:1], testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed, skipped = len(outcome.failures) + len(outcome.errors), len(outcome.skipped)
    print(f'{outcome.testsRun - failed - skipped} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)


if __name__ == '__main__':
    main()

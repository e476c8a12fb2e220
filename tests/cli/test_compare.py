"""`trammel compare`: statuses, odd inputs, options, where things are written."""
import gzip
import json
import math
import os
import resource
import signal
import subprocess
import unittest

import harness

ATOMS = (('N', 0.0, 0.0), ('CA', 1.46, 0.0), ('C', 2.0, 1.4), ('O', 1.3, 2.4))


def pdb(models, chains='A', residues=6, wobble=0.2, names=ATOMS, first=1, shift=None):
    """Invented models of a helix of points, each a little different."""
    lines = []
    for m in range(models):
        lines.append(f'MODEL {m + 1:8}')
        serial = 0
        for c, chain in enumerate(chains):
            for r in range(residues):
                for k, (name, x, y) in enumerate(names):
                    serial += 1
                    angle = 1.75 * r + 0.4 * k
                    place = ((2.3 + x / 5) * math.cos(angle) + 12 * c, (2.3 + y / 5) * math.sin(angle), 1.5 * r + 0.3 * k)
                    place = [p + wobble * math.sin(7.1 * m + 3.3 * serial + 1.7 * axis) for axis, p in enumerate(place)]
                    if shift:
                        place = shift(m, chain, first + r, place)
                    lines.append(f'ATOM  {serial:5}  {name:3} ALA {chain}{first + r:4}    ' + ''.join(f'{p:8.3f}' for p in place) +
                                 f'  1.00  0.00          {name[0]:>2}')
        lines.append('ENDMDL')
    return '\n'.join(lines + ['END', ''])


class Compare(harness.CommandTest):
    def compare(self, *arguments, **how):
        """The figures as JSON."""
        return json.loads(self.trammel('compare', *arguments, '--json', '-', **how)[0])

    def bad(self, *arguments, says, **how):
        out, err = self.trammel('compare', *arguments, status=2, **how)
        self.assertEqual(out, '')
        self.assertIn(says, err)

    def test_report_and_figures_agree(self):
        models = self.write('m.pdb', pdb(5))
        out, err = self.trammel('compare', models, '--json', 'c.json')
        told = json.loads(self.read('c.json'))
        self.assertEqual(err, '')
        self.assertIn(f"medoid: model {told['medoid']}, ", out)
        self.assertIn(f"{told['pairs']['mean']:8.3f} {told['pairs']['min']:8.3f}  {told['pairs']['max']:8.3f}", out)
        self.assertIn('core: A:1-6', out)
        self.assertLessEqual(max(map(len, out.splitlines())), 100)

    def test_one_model_needs_a_reference(self):
        one = self.write('one.pdb', pdb(1))
        self.bad(one, says='one model, and no reference')
        out, _ = self.trammel('compare', one, self.write('two.pdb', pdb(2, wobble=0.5)))
        self.assertIn('models from the reference', out)
        self.assertIn('one model alone does not tell its core', out)

    def test_wrong_use(self):
        models = self.write('m.pdb', pdb(3))
        self.bad(says='No input')
        self.bad(models, models, models, says='not 3 files')
        self.bad('-', '-', says='only once')
        self.bad('no-such-file', says='No such file')
        for value in ('', ',', 'A:', 'A:5-', 'A:9-5', ':5', 'A:1-2-3', 'A:x', '1,,2', 'A:99999999999'):
            self.bad(models, '--core', value, says='is no stretch of residues')
        self.bad(models, '--core', 'A:1-3,B:1-3', says="none of the chosen atoms in 'B:1-3'")
        self.bad(models, '--core', '70-80', says="none of the chosen atoms in '70-80'")
        self.bad(models, '--atoms', 'CA,', says='empty word')
        self.bad(models, '--atoms', '@Q1', says='names no element')
        self.bad(models, '--atoms', 'ZZ', says="is selected by 'ZZ'")
        for value in ('-1', 'nan', 'x', '1e9'):
            self.bad(models, '--cut', value, says='--cut takes a number')
        self.bad(models, '--json', models, says='one of the inputs')
        self.bad(models, '--json', '.', says='folder')
        self.bad(models, '--colour', says='no option here')

    def test_inputs_that_are_no_models(self):
        for content in ('', 'hello\n', 'ATOM\n', 'sheet 1\natom A bead\n', b'\x00\x01\x02', 'data_x\nloop_\n_atom_site.id\n'):
            path = self.write('x', content)
            self.bad(path, says='trammel: ')
            self.bad(self.write('m.pdb', pdb(2)), path, says='trammel: ')

    def test_a_reference_that_has_nothing_in_common(self):
        models = self.write('m.pdb', pdb(3))
        self.bad(models, self.write('r.pdb', pdb(1, first=500)), says='none of the 18 superposed atoms')

    def test_models_without_an_atom_in_common(self):
        lines = pdb(2).splitlines()
        half = lines.index('ENDMDL')
        text = '\n'.join(lines[:8] + ['ENDMDL'] + [lines[half + 1]] + lines[half + 10:])
        self.bad(self.write('m.pdb', text), says='no atom is in all of the 2 models')

    def test_atoms_that_some_models_lack_are_left_out_and_counted(self):
        lines = pdb(3).splitlines()
        del lines[3]  # CA ... of the first residue in model 1
        told = self.compare(self.write('m.pdb', '\n'.join(lines)))
        self.assertEqual(told['atoms_left_out'], 1)
        self.assertEqual(told['atoms'], 23)

    def test_coordinates_beyond_reason(self):
        rows = ''.join(f'C{k} {x} 0 0 {m}\n' for m in (1, 2) for k, x in enumerate(('0', '1', '1e200')))
        head = 'data_x\nloop_\n_atom_site.label_atom_id\n_atom_site.Cartn_x\n_atom_site.Cartn_y\n_atom_site.Cartn_z\n' \
               '_atom_site.pdbx_PDB_model_num\n'
        self.bad(self.write('m.cif', head + rows), says='has a coordinate of 1e+200')

    def test_standard_input_and_gzip(self):
        text = pdb(4).encode()
        path = self.write('m.pdb', text)
        plain = self.compare(path)
        self.assertEqual(self.compare('-', stdin=text), plain)
        self.assertEqual(self.compare('-', stdin=gzip.compress(text)), plain)
        self.assertIsNotNone(self.compare(path, '-', stdin=text)['reference'])

    def test_threads_do_not_show(self):
        path = self.write('m.pdb', pdb(30))
        self.assertEqual(self.compare(path, '-t', 1), self.compare(path, '-t', 5))

    def test_identical_models(self):
        path = self.write('m.pdb', pdb(4, wobble=0))
        told = self.compare(path, path)
        self.assertLess(told['pairs']['max'], 1e-5)
        self.assertLess(told['reference']['to_medoid'], 1e-5)
        self.assertEqual(len(told['clusters']['list']), 1)

    def test_beads_and_one_atom(self):
        rows = ''.join(f'HETATM    1  X   UNL A   1    {m:8.3f}   0.000   0.000\nENDMDL\n' for m in range(50))
        told = self.compare(self.write('m.pdb', rows))
        self.assertEqual((told['models'], told['atoms'], told['superposed']['chosen']), (50, 1, 'heavy'))
        self.assertLess(told['pairs']['max'], 1e-9)

    def test_the_core_as_reported_can_be_asked_for(self):
        def loose(model, _chain, number, place):
            return [p + 9 * math.sin(2.9 * model + axis) * (number in (1, 2, 5)) for axis, p in enumerate(place)]
        path = self.write('m.pdb', pdb(8, 'AB', 9, shift=loose))
        out, _ = self.trammel('compare', path)
        core = next(line for line in out.splitlines() if line.startswith('core: '))[6:]
        self.assertEqual(core, 'A:3-4, A:6-9, B:3-4, B:6-9')
        asked, found = self.compare(path, '--core', core), self.compare(path)
        self.assertEqual((asked['per_atom'], asked['pairs']), (found['per_atom'], found['pairs']))

    @unittest.skipIf(os.environ.get('TRAMMEL_SANITIZED'), 'sanitizers take all addresses for themselves')
    def test_more_pairs_than_memory_holds(self):
        rows = ''.join(f'HETATM    1  X   UNL A   1    {m % 1000:8.3f}   0.000   0.000\nENDMDL\n' for m in range(20000))
        path = self.write('m.pdb', rows)
        limit = 500 << 20
        done = subprocess.run([harness.PROGRAM, 'compare', path], capture_output=True, timeout=120, check=False,
                              preexec_fn=lambda: resource.setrlimit(resource.RLIMIT_AS, (limit, limit)),
                              env={**os.environ, 'OPENBLAS_NUM_THREADS': '1'})
        self.assertEqual((done.returncode, done.stdout), (3, b''))
        self.assertRegex(done.stderr.decode(), 'memory')

    def test_many_models_are_interruptible(self):
        rows = ''.join(f'HETATM    1  X   UNL A   1    {m % 1000:8.3f}   0.000   0.000\nENDMDL\n' for m in range(8000))
        process = self.start([harness.PROGRAM, 'compare', self.write('m.pdb', rows), '--progress'])
        self.assertIn(b'pairs', process.stderr.readline())
        process.send_signal(signal.SIGTERM)
        try:
            process.communicate(timeout=60 * harness.SLOWER)
        except subprocess.TimeoutExpired:
            self.fail('still running')
        self.assertEqual(process.returncode, 128 + signal.SIGTERM)


if __name__ == '__main__':
    harness.main()

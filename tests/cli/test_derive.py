"""trammel derive: sheets from coordinates that read back, and limits measured on the coordinates' own columns."""
import math
import random
import subprocess

import harness

LINES = [('N', 'GLY', 1, 0.0, 0.0, 0.0), ('CA', 'GLY', 1, 1.458, 0.0, 0.0), ('C', 'GLY', 1, 2.0, 1.42, 0.0),
         ('O', 'GLY', 1, 1.26, 2.40, 0.0), ('N', 'ALA', 2, 3.33, 1.53, 0.0), ('CA', 'ALA', 2, 4.0, 2.82, 0.0),
         ('C', 'ALA', 2, 5.52, 2.66, 0.0), ('O', 'ALA', 2, 6.05, 1.55, 0.0), ('CB', 'ALA', 2, 3.6, 3.61, 1.22)]


def record(serial, name, residue, number, x, y, z, chain='A', alternative=' ', occupancy=1.0):
    """Columns of PDB format 3.3."""
    return (f'ATOM  {serial:5d}  {name:<3s}{alternative}{residue} {chain}{number:4d}    {x:8.3f}{y:8.3f}{z:8.3f}{occupancy:6.2f}'
            f'  0.00          {name[0]:>2s}\n')


def pdb(shift=0.0):
    return ''.join(record(i + 1, n, r, k, x, y, z + shift * (i % 3)) for i, (n, r, k, x, y, z) in enumerate(LINES))


def limits(sheet):
    rows = [line.split() for line in sheet.splitlines() if line.startswith('limit')]
    return {(r[1], r[2]): (float(r[3]), float(r[4])) for r in rows}


class Derive(harness.CommandTest):
    def test_bare_limits_are_the_distances_in_the_file(self):
        self.write('m.pdb', pdb())
        sheet, _ = self.trammel('derive', 'm.pdb', '--covalent', 'no', '--cutoff', 3, '--error', 0.25)
        meant = {}
        for i, (a, _, k, *p) in enumerate(LINES):
            for b, _, m, *q in LINES[i + 1:]:
                if math.dist(p, q) <= 3:
                    meant[f'A:{k}:{a}', f'A:{m}:{b}'] = math.dist(p, q)
        found = limits(sheet)
        self.assertEqual(set(found), set(meant))
        for pair, (lower, upper) in found.items():
            self.assertAlmostEqual(lower, max(meant[pair] - 0.25, 0), delta=0.0011)
            self.assertAlmostEqual(upper, meant[pair] + 0.25, delta=0.0011)
        self.write('m.sheet', sheet)
        self.trammel('check', 'm.sheet')

    def test_a_sequence_with_chemistry_reads_back_and_leaves_out_what_is_fixed(self):
        self.write('m.pdb', pdb())
        sheet, _ = self.trammel('derive', 'm.pdb')
        self.assertIn('sequence A 1 GLY ALA', sheet)
        found = limits(sheet)
        self.assertNotIn(('A:1:N', 'A:1:CA'), found)
        self.assertNotIn(('A:1:N', 'A:1:C'), found)
        self.assertIn(('A:1:CA', 'A:2:CA'), found)
        self.write('m.sheet', sheet)
        out, _ = self.trammel('check', 'm.sheet')
        self.assertIn(f'{len(found)} distances', out)

    def test_models_give_their_range_and_one_model_its_own_distances(self):
        self.write('m.pdb', f'MODEL        1\n{pdb()}ENDMDL\nMODEL        2\n{pdb(0.7)}ENDMDL\n')
        arguments = ('derive', 'm.pdb', '--covalent', 'no', '--error', 0, '--cutoff', 100, '--atoms', 'backbone')
        both, one, two = (limits(self.trammel(*arguments, *more)[0]) for more in ((), ('--model', 1), ('--model', 2)))
        self.assertEqual(set(both), set(one))
        for pair, (lower, upper) in both.items():
            self.assertAlmostEqual(lower, min(one[pair][0], two[pair][0]), delta=1e-9)
            self.assertAlmostEqual(upper, max(one[pair][1], two[pair][1]), delta=1e-9)
        self.trammel(*arguments, '--model', 3, status=2)

    def test_selections(self):
        self.write('m.pdb', pdb())
        for words, atoms in (('CA', {'CA'}), ('C*', {'C', 'CA', 'CB'}), ('@O', {'O'}), ('@O,CB', {'O', 'CB'}),
                             ('backbone', {'N', 'CA', 'C', 'O'})):
            sheet, _ = self.trammel('derive', 'm.pdb', '--covalent', 'no', '--atoms', words)
            named = {line.split()[1].split(':')[2] for line in sheet.splitlines() if line.startswith('atom')}
            self.assertEqual(named, atoms)
        for words in ('', ',', 'CA,', '@Qq', 'XX', 'hydrogens'):
            self.trammel('derive', 'm.pdb', '--atoms', words, status=2)

    def test_the_likelier_alternative_is_taken(self):
        rows = [record(1, 'N', 'GLY', 1, 0, 0, 0), record(2, 'CA', 'GLY', 1, 1.0, 0, 0, alternative='A', occupancy=0.3),
                record(3, 'CA', 'GLY', 1, 2.0, 0, 0, alternative='B', occupancy=0.7)]
        self.write('m.pdb', ''.join(rows))
        sheet, _ = self.trammel('derive', 'm.pdb', '--covalent', 'no', '--error', 0)
        self.assertEqual(limits(sheet), {('A:1:N', 'A:1:CA'): (2.0, 2.0)})
        self.assertIn('alternative', sheet)

    def test_a_broken_chain_goes_on_under_another_code(self):
        far = ''.join(record(i + 10, n, r, k + 8, x, y, z + 30) for i, (n, r, k, x, y, z) in enumerate(LINES))
        self.write('m.pdb', pdb() + far)
        sheet, _ = self.trammel('derive', 'm.pdb')
        self.assertIn('sequence A 1 GLY ALA', sheet)
        self.assertIn('sequence A_2 9 GLY ALA', sheet)
        self.write('m.sheet', sheet)
        self.trammel('check', 'm.sheet')

    def test_a_single_link_written_as_items(self):
        """As the wwPDB writes a category of one row (PDBx/mmCIF): not as a loop."""
        site = '{0} {1} CYS A {2} {3} 0 0\n'
        tags = ('id', 'label_atom_id', 'label_comp_id', 'label_asym_id', 'label_seq_id', 'Cartn_x', 'Cartn_y', 'Cartn_z')
        sites = 'loop_\n' + ''.join(f'_atom_site.{tag}\n' for tag in tags)
        sites += ''.join(site.format(i, name, number, x) for i, (name, number, x) in enumerate(
            (('CA', 1, 0), ('SG', 1, 1.8), ('SG', 2, 3.8), ('CA', 2, 5.6))))
        link = '_struct_conn.id disulf1\n_struct_conn.conn_type_id disulf\n' + ''.join(
            f'_struct_conn.ptnr{k}_label_{tag} {value}\n' for k in (1, 2) for tag, value in (
                ('asym_id', 'A'), ('seq_id', k), ('comp_id', 'CYS'), ('atom_id', 'SG')))
        self.write('m.cif', 'data_x\n' + link + sites)
        sheet, _ = self.trammel('derive', 'm.cif')
        self.assertIn('link A:1:SG A:2:SG', sheet)

    def test_noise_and_choice_follow_the_seed(self):
        self.write('m.pdb', pdb())
        arguments = ('derive', 'm.pdb', '--covalent', 'no', '--cutoff', 9, '--noise', 0.3, '--keep', 0.5, '--seed')
        one, again, other = (self.trammel(*arguments, seed)[0] for seed in (4, 4, 5))
        self.assertEqual(one, again)
        self.assertNotEqual(limits(one), limits(other))
        self.assertLess(len(limits(one)), 36)
        self.assertGreater(len(limits(one)), 3)

    def test_what_build_writes_can_be_derived_from(self):
        self.trammel('build', harness.PEPTIDE, '-n', 2, '-o', 'm.pdb')
        self.trammel('build', harness.PEPTIDE, '-n', 2, '-o', 'm.cif.gz')
        one, _ = self.trammel('derive', 'm.pdb', '--atoms', 'all')
        two, _ = self.trammel('derive', 'm.cif.gz', '--atoms', 'all', '-o', '-')
        self.assertEqual(one, two)
        self.assertNotIn('left out', one)
        self.write('m.sheet', one)
        self.trammel('check', 'm.sheet')

    def test_a_reader_that_goes_away(self):
        self.write('m.pdb', pdb())
        with subprocess.Popen([harness.PROGRAM, 'derive', self.path('m.pdb')], stdout=subprocess.PIPE,
                              stderr=subprocess.PIPE) as process:
            process.stdout.close()
            err = process.stderr.read().decode()
            self.assertEqual(process.wait(timeout=20 * harness.SLOWER), 3)
            self.assertIn('trammel: ', err)

    def test_bad_files_are_told_with_their_line(self):
        good = pdb()
        for content, line in ((good.replace('   1.458', '   1.4x8'), 2), (good + 'ATOM     10  N   ALA A   3\n', 10),
                              ('data_x\nloop_\n_atom_site.label_atom_id\n_atom_site.Cartn_x\nCA 1\n', 3)):
            self.write('bad.pdb', content)
            _, err = self.trammel('derive', 'bad.pdb', status=2)
            self.assertIn(f'bad.pdb:{line}:', err)
        for content in ('', 'nothing here\n', 'data_x\n', b'\xff\xfe\x00'):
            self.write('bad.pdb', content)
            self.trammel('derive', 'bad.pdb', status=2)
        self.trammel('derive', 'absent.pdb', status=2)
        self.trammel('derive', status=2)
        self.trammel('derive', '--covalent', 'maybe', 'bad.pdb', status=2)

    def test_scrambled_files_never_crash(self):
        chance = random.Random(1)
        text = bytearray((pdb() + 'SSBOND   1 CYS A    1    CYS A    2\n').encode())
        for _ in range(150):
            bad = bytearray(text)
            for _ in range(chance.randint(1, 12)):
                bad[chance.randrange(len(bad))] = chance.choice(b' \n0123456789.-ACNe"#%*:\xc3')
            self.write('bad.pdb', bytes(bad))
            for covalent in ('yes', 'no'):
                try:
                    sheet, _ = self.trammel('derive', 'bad.pdb', '--covalent', covalent, status=0)
                except AssertionError:
                    self.trammel('derive', 'bad.pdb', '--covalent', covalent, status=2)
                    continue
                self.write('bad.sheet', sheet)
                try:
                    self.trammel('check', 'bad.sheet')
                except AssertionError:
                    self.trammel('check', 'bad.sheet', status=1)


if __name__ == '__main__':
    harness.main()

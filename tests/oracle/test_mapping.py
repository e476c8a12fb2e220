"""Names in NEF restraints to atoms: every residue and many names, against regular expressions; the rules are those of NEF 1.1
(Gutmanas et al., Nature Struct. Mol. Biol. 22 (2015) 433): % stands for digits, * for anything, x and y for a pair's members."""
import collections
import os
import random
import re
import subprocess
import sys
import tempfile
import unittest

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
RESIDUES = 'ALA ARG ASN ASP CYS GLN GLU GLY HIS ILE LEU LYS MET PHE PRO SER THR TRP TYR VAL'.split()
COLUMNS = ['restraint_id'] + [f'{name}_{k}' for k in '12' for name in ('chain_code', 'sequence_code', 'residue_name', 'atom_name')]
COLUMNS += ['lower_limit', 'upper_limit']


def sequence():
    rows = '\n'.join(f'{i + 1} A {i + 1} {name} {"start" if i == 0 else "end" if i == len(RESIDUES) - 1 else "middle"}'
                     for i, name in enumerate(RESIDUES))
    tags = '\n'.join(f'_nef_sequence.{name}' for name in ('index', 'chain_code', 'sequence_code', 'residue_name', 'linking'))
    return f'data_names\nsave_nef_molecular_system\nloop_\n{tags}\n{rows}\nstop_\nsave_\n'


def dump(text):
    with tempfile.NamedTemporaryFile('w', suffix='.nef') as file:
        file.write(text)
        file.flush()
        done = subprocess.run([os.path.join(BUILD, 'oracle', 'dump_restraints'), file.name], capture_output=True, text=True, timeout=120,
                              check=True)
    return [line.split('\t') for line in done.stdout.splitlines()]


def expression(name):
    parts = {'%': '[0-9]+', '*': '.*', 'x': "(?:[0-9]|''?)", 'y': "(?:[0-9]|''?)"}
    return re.compile(''.join(parts.get(sign, re.escape(sign)) for sign in name))


def expected(atoms, name):
    if name in atoms:
        return [atoms[name]]
    if not set(name) & set('%*xy'):
        return []
    return [number for atom, number in atoms.items() if expression(name).fullmatch(atom)]


def patterns(generator, name):
    """Names with signs in place of some of an atom's digits and letters."""
    for _ in range(6):
        out = ''
        for sign in name:
            kind = generator.random()
            if kind < 0.6 and sign.isdigit():
                out += generator.choice('%*xy%x')
            elif kind < 0.1:
                out += generator.choice(('*', '%', '', '*%', '%*'))
            else:
                out += sign
        if out and out not in ('H', 'HN') and out[0] not in 'QMxy':
            yield out


class Mapping(unittest.TestCase):
    def test_every_residue_s_names_mean_what_the_rules_say(self):
        generator = random.Random(3)
        atoms = collections.defaultdict(dict)
        for row in dump(sequence()):
            if row[0] == 'atom':
                atoms[int(row[3])][row[5]] = int(row[1])
        cases = [(residue, pattern) for residue in atoms for name in atoms[residue] for pattern in [name, *patterns(generator, name)]]
        rows = '\n'.join(f"{k + 1} A {residue} {RESIDUES[residue - 1]} \"{name}\" A 1 ALA CA 1.0 9.0" for k, (residue, name) in enumerate(cases))
        tags = '\n'.join(f'_nef_distance_restraint.{name}' for name in COLUMNS)
        found, reasons = {}, {}
        for row in dump(f'{sequence()}save_list\nloop_\n{tags}\n{rows}\nstop_\nsave_\n'):
            if row[0] == 'distance':
                current = int(row[2])
            elif row[0] == 'alternative':
                found[current] = [int(atom) for atom in row[2].split(',')]
            elif row[0] == 'unmapped':
                reasons[int(row[2])] = row[3]
        self.assertGreater(len(cases), 1000)
        seen = collections.Counter()
        for k, (residue, name) in enumerate(cases):
            want = expected(atoms[residue], name)
            if want == [atoms[1]['CA']]:
                want = []  # the same atom on both sides
            self.assertEqual(found.get(k + 1, []), want, (RESIDUES[residue - 1], name))
            self.assertEqual(k + 1 in reasons, not want, (RESIDUES[residue - 1], name))
            seen[min(len(want), 3)] += 1
        self.assertTrue(all(seen[size] > 50 for size in range(4)), seen)


if __name__ == '__main__':
    result = unittest.main(exit=False, verbosity=1).result
    failed = len(result.failures) + len(result.errors)
    print(f'{result.testsRun - failed} passed, {failed} failed')
    sys.exit(1 if failed else 0)

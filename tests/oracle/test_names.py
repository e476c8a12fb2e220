"""Which atoms a name means, against regular expressions written from the rules of NEF 1.1 (Gutmanas et al., Nature Struct. Mol.
Biol. 22 (2015) 433): % is a number, * anything, x and y the members of a pair not told apart; over all twenty residues.
Pseudo-atoms are those of Markley et al., Pure Appl. Chem. 70 (1998) 117; the table below is typed from memory.
"""
import os
import re
import subprocess
import sys
import unittest

DUMP = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'oracle', 'dump_names')
RESIDUES = 'ALA ARG ASN ASP CYS GLN GLU GLY HIS ILE LEU LYS MET PHE PRO SER THR TRP TYR VAL'.split()
PSEUDO = {
    ('ALA', 'MB'): 'HB1 HB2 HB3', ('GLY', 'QA'): 'HA2 HA3', ('SER', 'QB'): 'HB2 HB3', ('THR', 'MG'): 'HG21 HG22 HG23',
    ('VAL', 'MG1'): 'HG11 HG12 HG13', ('VAL', 'MG2'): 'HG21 HG22 HG23', ('VAL', 'QG'): 'HG11 HG12 HG13 HG21 HG22 HG23',
    ('LEU', 'MD1'): 'HD11 HD12 HD13', ('LEU', 'QD'): 'HD11 HD12 HD13 HD21 HD22 HD23', ('ILE', 'MD'): 'HD11 HD12 HD13',
    ('ILE', 'MG'): 'HG21 HG22 HG23', ('ILE', 'QG'): 'HG12 HG13', ('LYS', 'QE'): 'HE2 HE3', ('LYS', 'QZ'): 'HZ1 HZ2 HZ3',
    ('MET', 'ME'): 'HE1 HE2 HE3', ('GLN', 'QE'): 'HE21 HE22', ('ASN', 'QD'): 'HD21 HD22', ('PHE', 'QD'): 'HD1 HD2',
    ('TYR', 'QE'): 'HE1 HE2', ('PHE', 'QR'): 'HD1 HD2 HE1 HE2 HZ', ('TYR', 'QR'): 'HD1 HD2 HE1 HE2',
    ('ARG', 'QH1'): 'HH11 HH12', ('ARG', 'QH'): 'HH11 HH12 HH21 HH22',
}
WELL_KNOWN = {('VAL', 'HG%'): 6, ('PHE', 'HD%'): 2, ('GLN', 'HE2%'): 2, ('LEU', 'HDx%'): 6, ('LYS', 'HBx'): 2, ('THR', 'HG2%'): 3}


def ask(residue, names):
    lines = subprocess.run([DUMP, residue, *names], check=True, capture_output=True, text=True).stdout.splitlines()
    return lines[0].split(), dict(zip(names, (line.split() for line in lines[1:])))


def pattern_of(name):
    rules = {'%': '[0-9]+', '*': '.*', 'x': "[0-9']", 'y': "[0-9']"}
    return re.compile(''.join(rules.get(c, re.escape(c)) for c in name))


class Names(unittest.TestCase):
    def test_wildcards_are_those_of_an_independent_matcher(self):
        asked = 0
        for residue in RESIDUES:
            atoms, _ = ask(residue, [])
            names = {'*', '*%', '%', 'x', 'H*%', 'H%%', '*%*', 'H*%x', 'C%', '**', 'ZZ%'}
            for atom in atoms:
                for cut in range(1, len(atom) + 1):
                    names |= {atom[:cut] + end for end in ('%', '*', 'x', 'y', 'x%', '%x', '*%', '%*', 'y%', '*x')}
                    names |= {atom[:cut - 1] + wild + atom[cut:] for wild in '%*xy'}
            names = sorted(names - set(atoms))
            _, answers = ask(residue, names)
            for name in names:
                with self.subTest(residue=residue, name=name):
                    self.assertEqual(answers[name], [a for a in atoms if pattern_of(name).fullmatch(a)])
                    asked += 1
        self.assertGreater(asked, 5000)

    def test_an_atom_s_own_name_means_that_atom(self):
        for residue in RESIDUES:
            atoms, _ = ask(residue, [])
            self.assertEqual(ask(residue, atoms)[1], {a: [a] for a in atoms})

    def test_groups_of_the_trade_have_their_size(self):
        for (residue, name), count in WELL_KNOWN.items():
            with self.subTest(residue=residue, name=name):
                self.assertEqual(len(ask(residue, [name])[1][name]), count)

    def test_pseudo_atoms_mean_their_hydrogens(self):
        for (residue, name), expected in PSEUDO.items():
            with self.subTest(residue=residue, name=name):
                self.assertEqual(sorted(ask(residue, [name])[1][name]), expected.split())


def main():
    outcome = unittest.main(exit=False, argv=sys.argv[:1], testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed, skipped = len(outcome.failures) + len(outcome.errors), len(outcome.skipped)
    print(f'{outcome.testsRun - failed - skipped} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)


if __name__ == '__main__':
    main()

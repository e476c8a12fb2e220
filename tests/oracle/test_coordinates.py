"""The reader of PDB and mmCIF coordinates against gemmi's, on entries of the Protein Data Bank as Debian's examples of structure
superposition carry them; each also as mmCIF, written by gemmi."""
import glob
import gzip
import os
import subprocess
import sys
import tempfile
import unittest

import gemmi

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
PLACES = ('/usr/share/doc/theseus', '/usr/share/doc/theseus-examples', '/usr/share/theseus-examples', '/usr/share/doc/mustang',
          '/usr/share/doc/mustang-testdata', '/usr/share/mustang-testdata', '/usr/share/mustang')


def entries():
    found = set()
    for place in PLACES:
        for suffix in ('pdb', 'ent'):
            for tail in ('', '.gz'):
                found.update(glob.glob(f'{place}/**/*.{suffix}{tail}', recursive=True))
    return sorted(found)


def read_by_gemmi(path):
    """Entries from before 1996 have other things in columns 73 to 80, where gemmi looks for element and charge."""
    try:
        return gemmi.read_pdb(path)
    except RuntimeError:
        with (gzip.open if path.endswith('.gz') else open)(path, 'rt') as file:
            return gemmi.read_pdb_string('\n'.join(line.rstrip('\n')[:72] for line in file))


def dump(path):
    done = subprocess.run([os.path.join(BUILD, 'oracle', 'dump_coordinates'), path], capture_output=True, text=True, timeout=120,
                          check=False)
    rows = [line.split('\t') for line in done.stdout.splitlines()]
    atoms = {(int(r[1]), r[2], r[3], r[4], r[5]): (r[6].upper(), *map(float, r[7:10])) for r in rows if r[0] == 'atom'}
    return done, atoms, [r[1:] for r in rows if r[0] == 'link']


def expected(structure):
    """One place for each atom: the highest occupancy, the first of equals; a residue has the name it was first met with."""
    atoms, occupancy, names = {}, {}, {}
    for number, model in enumerate(structure):
        for chain in model:
            for residue in chain:
                code = f'{residue.seqid.num}{residue.seqid.icode}'.strip()
                if names.setdefault((chain.name, code), residue.name) != residue.name:
                    continue
                for atom in residue:
                    key = (number, chain.name or '_', code, residue.name, atom.name)
                    if key in atoms and not atom.occ > occupancy[key]:
                        continue
                    atoms[key] = (atom.element.name.upper(), *(round(x, 3) for x in atom.pos.tolist()))
                    occupancy[key] = atom.occ
    return atoms


class Coordinates(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        cls.entries = entries()
        if not cls.entries:
            raise unittest.SkipTest('no example entries on this machine')

    def compare(self, path, structure):
        done, atoms, _ = dump(path)
        self.assertEqual(done.returncode, 0, done.stderr)
        meant = expected(structure)
        self.assertEqual(set(atoms), set(meant), path)
        for key, (element, *xyz) in meant.items():
            if element != 'X':
                self.assertEqual(atoms[key][0], element, (path, key))
            for got, wanted in zip(atoms[key][1:], xyz):
                self.assertAlmostEqual(got, wanted, delta=0.0011)

    def test_pdb_files(self):
        for path in self.entries:
            with self.subTest(path):
                self.compare(path, read_by_gemmi(path))
        print(f'{len(self.entries)} entries', file=sys.stderr)

    def test_the_same_as_mmcif(self):
        with tempfile.TemporaryDirectory() as folder:
            for path in self.entries[::4]:
                with self.subTest(path):
                    structure = read_by_gemmi(path)
                    structure.setup_entities()
                    other = os.path.join(folder, 'x.cif')
                    structure.make_mmcif_document().write_file(other)
                    self.compare(other, gemmi.read_structure(other))

    def test_links(self):
        checked = 0
        with tempfile.TemporaryDirectory() as folder:
            for path in self.entries[::3]:
                structure = read_by_gemmi(path)
                meant = {frozenset(((p.chain_name, str(p.res_id.seqid), p.atom_name) for p in (c.partner1, c.partner2)))
                         for c in structure.connections if c.type == gemmi.ConnectionType.Disulf and c.asu != gemmi.Asu.Different}
                if not meant:
                    continue
                other = os.path.join(folder, 'x.cif')
                structure.setup_entities()
                structure.make_mmcif_document().write_file(other)
                for name in (path, other):
                    found = {frozenset((tuple(r[:3]), tuple(r[3:]))) for r in dump(name)[2]}
                    self.assertLessEqual(meant, found, name)
                    checked += 1
        if not checked:
            self.skipTest('no entry with disulfides')


if __name__ == '__main__':
    outcome = unittest.main(exit=False, testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed = len(outcome.failures) + len(outcome.errors)
    skipped = len(outcome.skipped)
    print(f'{max(outcome.testsRun - failed - skipped, 0)} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)

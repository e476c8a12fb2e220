"""The STAR and CIF lexer against an independent CIF library: corner cases of the grammar (International Tables for Crystallography
G, 2.2), and files of the open monomer dictionary."""
import glob
import os
import subprocess
import sys
import unittest

import gemmi

DUMP = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'oracle', 'dump_star')
DICTIONARY = '/usr/share/refmac/monomers'
ACCEPTED = [
    "data_a\n_t 'a'b c'\n", 'data_a\n_t "x\'y"\n', "data_a\n_t O5'\n", "data_a\n_t\n;one\ntwo\n;\n_u 1\n", 'data_a\n_t\n;\n;\n',
    'data_a\n_t a;b\n', 'data_a _t ;b\n', 'data_a\n_t . _u ? _v "." _w \'?\'\n', 'data_a _t a#b # c\n', '# c\ndata_a\n_t 1',
    'data_a\r\n_t 1\r\nloop_\r\n_u\r\n_v\r\n1 2\r\n3 4\r\n', 'DATA_a\nLOOP_ _t 1 2 3\n_u 4\n', 'data_a\nloop_ _t _u 1 2\nloop_ _v 3\n',
    'data_a\n_t "loop_"\n_u \'_v\'\n', 'data_a\n_t\n;a\n ;\n;\n', 'data_a\n_t\n;\'quoted"\n;\n', 'data_a _t 1.5(2) _u -3\n',
    "data_a\n_t ''\n_u \"\"\n", 'data_a\n_t\t1\n\t_u\t2\n', "data_a _t a'b'c _u a\"b\n", 'data_a\n_t 1\ndata_b\n_t 2\n',
]
REFUSED = {
    "data_a\n_t 'open\n": 2, 'data_a\n_t\n;open\n': 3, 'data_a\nloop_\n_t\n_u\n1 2 3\n': 2, 'data_a\n_t\n_u 1\n': 3, '_t 1\n': 1,
    'data_a\n\nloop_\n1 2\n': 4, 'data_a\n_t 1 2\n': 2, 'data_a\n_t "open\'\n': 2, 'data_a\n_t\n': None,
}


def own(text):
    out = subprocess.run([DUMP], input=text.encode(), check=True, capture_output=True).stdout
    if out.startswith(b'refused'):
        return out.decode().split()
    values, at = [], 0
    while at < len(out):
        colon = out.index(b':', at)
        length = int(out[at:colon])
        value = out[colon + 1:colon + 1 + abs(length)].decode()
        values.append(None if length < 0 else value)
        at = colon + 2 + abs(length)
    return values


def plain(value):
    return None if value in ('.', '?') else gemmi.cif.as_string(value)


def theirs(text):
    values = []
    for block in gemmi.cif.read_string(text):
        items, loops = [], []
        for item in block:
            if item.pair is not None:
                items += [item.pair[0], plain(item.pair[1])]
            elif item.loop is not None:
                for k, tag in enumerate(item.loop.tags):
                    loops += [tag] + [plain(v) for v in item.loop.values[k::item.loop.width()]]
        values += items + loops
    return [None if v is None else v.replace('\r\n', '\n') for v in values]


class Star(unittest.TestCase):
    def test_corner_cases_are_read_alike(self):
        for text in ACCEPTED:
            with self.subTest(text):
                self.assertEqual(own(text), theirs(text))

    def test_what_is_wrong_is_refused_by_both(self):
        for text, line in REFUSED.items():
            with self.subTest(text):
                self.assertEqual(own(text)[0], 'refused')
                if line is not None:
                    self.assertEqual(int(own(text)[1]), line)
                self.assertRaises(Exception, gemmi.cif.read_string, text)

    @unittest.skipUnless(os.path.isdir(DICTIONARY), 'no monomer dictionary on this machine')
    def test_files_of_the_open_monomer_dictionary_are_read_alike(self):
        paths = sorted(glob.glob(DICTIONARY + '/*/*.cif'))[::150]
        self.assertGreater(len(paths), 20)
        for path in paths:
            with self.subTest(path):
                with open(path, encoding='utf-8', newline='') as file:
                    text = file.read()
                self.assertEqual(own(text), theirs(text))


def main():
    outcome = unittest.main(exit=False, argv=sys.argv[:1], testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed, skipped = len(outcome.failures) + len(outcome.errors), len(outcome.skipped)
    print(f'{outcome.testsRun - failed - skipped} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)


if __name__ == '__main__':
    main()

"""The reader of STAR and CIF documents against two others, gemmi's and Biopython's: corner cases of the CIF 1.1 syntax
(International Tables for Crystallography G, 2.2.7), random documents, and files of the open monomer dictionary."""
import glob
import json
import os
import random
import subprocess
import sys
import tempfile
import unittest

import gemmi
from Bio.PDB.MMCIF2Dict import MMCIF2Dict

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
CORNERS = (
    "data_x\n_a.b 'a dog's life'\n_a.c \"5'-end\"\n_a.d O5'\n_a.e 'O5''\n_a.f ''\n",
    "data_x\n_a.b a#b # a comment 'with \"quotes\n_a.c '#no comment'\n#data_y\n_a.d 1\n",
    "data_x\n_a.b\n;one\n two\n;\n_a.c ;word\n_a.d\n;\n;\n_a.e\n; leading blank\n\n;\n",
    "data_x\n_a.b .\n_a.c ?\n_a.d '.'\n_a.e \"?\"\n_a.f ..\n_a.g ?.\n",
    "data_x\nloop_\n_a.b\n_a.c\n1 2\n3\n4 'f i v e' \"6\"\n\n;seven\n;\n8\n_z.z end\n",
    "data_x loop_ _a.b 1 2 3 loop_ _c.d _c.e 4 5 _z.z 6",
    "DATA_x\nLOOP_\n_A.b\nv\n_z.Z Loop\n",
    "data_x\r\n_a.b 'dos'\r\nloop_\r\n_c.d\r\n_c.e\r\n1 2\r\n3 4\r\n",
    "data_x\n\t_a.b\t\t'tab\tin it'\t# c\n",
    "data_x\n_a.b loop\n_a.c data\n_a.d dataset_1\n_a.e 'data_y'\n_a.f 'loop_'\n_a.g \"_tag\"\n",
    "data_x\n_a.b -1.5(3)\n_a.c +.5e-3\n_a.d 1,5\n",
    "data_x\n_a.b a;b\n_a.c a'b\n_a.d a\"b\"c\n",
)
NOT_BIOPYTHON = (CORNERS[6], CORNERS[9])  # it takes quoted keywords for keywords and upper-case ones for words
BAD = ("_a.b 1\n", "data_x\n_a.b\n", "data_x\n_a.b 'open\n", "data_x\n_a.b\n;open\n", "data_x\nloop_\n_a.b _a.c\n1 2 3\n",
       "data_x\n_a.b 1 2\n", "data_x\nloop_\n1\n", "word\n")


def ours(text, name='document.cif'):
    """Frames as dump_star gives them, or None with its message."""
    with tempfile.TemporaryDirectory() as folder:
        path = os.path.join(folder, name)
        with open(path, 'wb') as file:
            file.write(text.encode())
        return ours_from(path)


def ours_from(path):
    done = subprocess.run([os.path.join(BUILD, 'oracle', 'dump_star'), path], capture_output=True, timeout=60, check=False)
    return (json.loads(done.stdout), '') if done.returncode == 0 else (None, done.stderr.decode())


def plain(value):
    return None if gemmi.cif.is_null(value) else gemmi.cif.as_string(value)


def lines_as_read(value):
    return value.replace('\r\n', '\n') if isinstance(value, str) else value


def gemmi_content(block):
    items, loops, frames = [], [], []
    for item in block:
        if item.pair is not None:
            items.append([item.pair[0], plain(item.pair[1])])
        elif item.loop is not None:
            loops.append({'tags': list(item.loop.tags), 'values': [plain(v) for v in item.loop.values]})
        elif item.frame is not None:
            frames.append((item.frame.name, gemmi_content(item.frame)[:2]))
    return items, loops, frames


def same(ours_read, document):
    """Blocks of gemmi's document, each with its items, loops and frames, against our frames."""
    blocks = []
    for frame in ours_read:
        content = ([[tag, lines_as_read(value)] for tag, value in frame['items']],
                   [{'tags': loop['tags'], 'values': [lines_as_read(v) for v in loop['values']]} for loop in frame['loops']])
        if frame['save']:
            blocks[-1][3].append((frame['name'], content))
        elif blocks and blocks[-1][0] == frame['name'] and blocks[-1][4]:
            blocks[-1][1].extend(content[0])
            blocks[-1][2].extend(content[1])
        else:
            blocks.append([frame['name'], content[0], content[1], [], True])
    theirs = [(block.name, *gemmi_content(block)) for block in document]
    return [tuple(block[:4]) for block in blocks] == [(n, i, l, f) for n, i, l, f in theirs]


class Syntax(unittest.TestCase):
    def test_corner_cases_read_as_gemmi_reads_them(self):
        for text in CORNERS:
            read, message = ours(text)
            self.assertIsNotNone(read, f'{text!r}: {message}')
            self.assertTrue(same(read, gemmi.cif.read_string(text)), f'{text!r}: {read}')

    def test_corner_cases_read_as_biopython_reads_them(self):
        compared = 0
        for text in CORNERS:
            if text in NOT_BIOPYTHON:
                continue
            with tempfile.NamedTemporaryFile('w', suffix='.cif', newline='') as file:
                file.write(text)
                file.flush()
                theirs = dict(MMCIF2Dict(file.name))
            self.assertEqual(theirs.pop('data_'), 'x')
            mine = {}
            for frame in ours(text)[0]:
                mine.update({tag: [value] for tag, value in frame['items']})
                for loop in frame['loops']:
                    for k, tag in enumerate(loop['tags']):
                        mine[tag] = loop['values'][k::len(loop['tags'])]
            self.assertEqual(set(mine), set(theirs), text)
            for tag, values in mine.items():
                self.assertEqual(len(values), len(theirs[tag]), text)
                for value, found in zip(values, theirs[tag]):
                    self.assertIn(found, ('.', '?') if value is None else (value,), text)
                    compared += 1
        self.assertGreater(compared, 40)

    def test_what_gemmi_refuses_is_refused_with_its_place(self):
        for text in BAD:
            with self.assertRaises((ValueError, RuntimeError), msg=repr(text)):
                gemmi.cif.read_string(text)
            read, message = ours(text)
            self.assertIsNone(read, repr(text))
            self.assertRegex(message, r'document\.cif:\d+:\d+: ')


def random_value(generator):
    kind = generator.randrange(8)
    word = ''.join(generator.choice("abcXYZ019.-+'\"#;_,()%*") for _ in range(generator.randrange(1, 9)))
    if kind == 0:
        return generator.choice('.?')
    if kind in (1, 2):
        quote = generator.choice('\'"')
        inner = ' '.join(generator.choice(("it", "a#b", ";", "x;", "", "loop_", "data_", "O5*", "1.0")) for _ in range(generator.randrange(4)))
        return f'{quote}{inner}{quote}'
    if kind == 3:
        lines = [generator.choice(('', 'text', "quote 'd", ' ; no end', '# no comment', 'loop_')) for _ in range(generator.randrange(1, 4))]
        return '\n;' + '\n'.join(lines) + '\n;'
    if word[0] in '_#$\'";[]' or word.lower().startswith(('data_', 'save_', 'loop_', 'stop_', 'global_')):
        return 'w' + word
    return word


def random_content(generator, serial):
    parts = []
    for _ in range(generator.randrange(1, 6)):
        serial[0] += 1
        gap = generator.choice((' ', '\n', '\t', ' # note\n', '\n\n'))
        if generator.random() < 0.5:
            parts.append(f'_c{serial[0]}.item{gap}{random_value(generator)}')
            continue
        width, rows = generator.randrange(1, 5), generator.randrange(1, 6)
        tags = ' '.join(f'_c{serial[0]}.t{k}' for k in range(width))
        values = generator.choice((' ', '\n')).join(random_value(generator) for _ in range(width * rows))
        parts.append(f'loop_{gap}{tags}\n{values}' + generator.choice(('', '\nstop_')))
    return '\n'.join(parts)


class Documents(unittest.TestCase):
    def test_random_documents_read_as_gemmi_reads_them(self):
        generator = random.Random(11)
        for _ in range(300):
            serial, text = [0], ''
            for block in range(generator.randrange(1, 3)):
                text += f'data_block{block}\n'
                for frame in range(generator.randrange(3)):
                    text += f'save_f{frame}\n{random_content(generator, serial)}\nsave_\n'
                text += random_content(generator, serial) + '\n'
            read, message = ours(text)
            self.assertIsNotNone(read, f'{text}\n{message}')
            self.assertTrue(same(read, gemmi.cif.read_string(text)), text)

    def test_the_open_monomer_dictionary(self):
        files = sorted(glob.glob('/usr/share/refmac/monomers/?/*.cif'))[::60]
        if not files:
            self.skipTest('the open monomer dictionary is not installed')
        compared = 0
        for path in files:
            with open(path, encoding='latin1') as file:
                text = file.read()
            try:
                document = gemmi.cif.read_string(text)
            except (ValueError, RuntimeError):
                continue  # some files have words before their first block
            read, message = ours(text)
            self.assertIsNotNone(read, f'{path}: {message}')
            self.assertTrue(same(read, document), path)
            compared += 1
        self.assertGreater(compared, len(files) // 2)


if __name__ == '__main__':
    result = unittest.main(exit=False, verbosity=1).result
    skipped, failed = len(result.skipped), len(result.failures) + len(result.errors)
    print(f'{result.testsRun - failed - skipped} passed, {failed} failed, {skipped} skipped')
    sys.exit(1 if failed else 0)

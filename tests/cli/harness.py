"""What the command tests share: running the program, places to write to, and the count at the end."""
import os
import subprocess
import sys
import tempfile
import unittest

BUILD = os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build'))
PROGRAM = os.path.join(BUILD, 'trammel')
HERE = os.path.dirname(os.path.abspath(__file__))
FIVE_RING = os.path.join(HERE, 'five-ring.sheet')
PEPTIDE = os.path.join(HERE, 'peptide.sheet')
CONTRADICTED = os.path.join(HERE, 'contradicted.sheet')
SLOWER = 10 if os.environ.get('TRAMMEL_SANITIZED') else 1


class CommandTest(unittest.TestCase):
    """A test with a folder of its own."""

    def setUp(self):
        self._folder = tempfile.TemporaryDirectory()
        self.folder = self._folder.name

    def tearDown(self):
        self._folder.cleanup()

    def path(self, name):
        return os.path.join(self.folder, name)

    def write(self, name, content):
        path = self.path(name)
        with open(path, 'wb') as file:
            file.write(content if isinstance(content, bytes) else content.encode())
        return path

    def read(self, name):
        with open(self.path(name), 'rb') as file:
            return file.read()

    def start(self, command, **how):
        """A process beside the test, which does not outlive it."""
        process = subprocess.Popen(command, cwd=self.folder, stdout=subprocess.PIPE, stderr=subprocess.PIPE, **how)

        def end():
            process.kill()
            process.communicate()
        self.addCleanup(end)
        return process

    def trammel(self, *arguments, status=0, stdin=b'', stdout=subprocess.PIPE, timeout=120):
        """Run the program; its standard output and error. The exit status must be the one expected."""
        done = subprocess.run([PROGRAM, *map(str, arguments)], input=stdin, stdout=stdout, stderr=subprocess.PIPE,
                              cwd=self.folder, timeout=timeout * SLOWER, check=False)
        out, err = (done.stdout or b'').decode(errors='replace'), done.stderr.decode(errors='replace')
        self.assertEqual(done.returncode, status, f'{arguments}: status {done.returncode}\n{out[-2000:]}\n{err[-4000:]}')
        self.assertNotIn('Sanitizer', err)
        return out, err


def main():
    outcome = unittest.main(exit=False, argv=sys.argv[:1], testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed, skipped = len(outcome.failures) + len(outcome.errors), len(outcome.skipped)
    print(f'{outcome.testsRun - failed - skipped} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)

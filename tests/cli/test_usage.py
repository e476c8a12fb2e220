"""Options, their values, help, and the exit statuses of wrong use."""
import harness
from harness import FIVE_RING


class Usage(harness.CommandTest):
    def bad(self, *arguments, says):
        """Wrong use: status 2, a message that says why, nothing on standard output, no file made."""
        import os
        before = sorted(os.listdir(self.folder))
        out, err = self.trammel(*arguments, status=2)
        self.assertEqual(out, '')
        self.assertIn(says, err)
        self.assertEqual(sorted(os.listdir(self.folder)), before)

    def test_no_command_gives_the_list(self):
        self.bad(says='usage: trammel COMMAND')

    def test_unknown_command_gives_the_list(self):
        self.bad('polish', FIVE_RING, says="'polish' is no command")

    def test_help_and_version(self):
        import re
        self.assertIn('commands:', self.trammel('--help')[0])
        self.assertRegex(self.trammel('--version')[0], re.compile(r'^trammel \d+\.\d+\.\d+\n$'))

    def test_every_listed_command_has_help_that_names_its_options(self):
        listed = [line.split()[0] for line in self.trammel('--help')[0].split('commands:\n')[1].split('\n\n')[0].splitlines()]
        self.assertGreaterEqual(set(listed), {'check', 'build', 'bounds'})
        for command in listed:
            out, err = self.trammel(command, '--help')
            self.assertTrue(out.startswith(f'usage: trammel {command}'), out)
            self.assertIn('Exit status', out)
            self.assertEqual(err, '')
            self.assertLessEqual(max(map(len, out.splitlines())), 128)

    def test_no_input(self):
        for command in ('check', 'bounds', 'build'):
            self.bad(command, says='No input')

    def test_unknown_options(self):
        for command in ('check', 'bounds', 'build'):
            self.bad(command, '--colour', FIVE_RING, says='--colour is no option here')
            self.bad(command, '-Z', FIVE_RING, says='-Z is no option here')
            self.bad(command, '--strict=yes', FIVE_RING, says='--strict takes no value')
            self.bad(command, FIVE_RING, '--threads', says='--threads needs a value')
        self.bad('build', FIVE_RING, '-o', says='--output needs a value')
        self.bad('build', FIVE_RING, '--s', '1', says='could be more than one option')

    def test_values_that_are_no_whole_numbers(self):
        for value in ('', 'x', '3x', '2.5', ' 3', '0x10', '1e3', 'nan', '--'):
            self.bad('build', FIVE_RING, '-o', 'm.pdb', f'--models={value}', says='whole number')

    def test_values_out_of_range(self):
        for option, values in {'--models': ('0', '-1', '99999999999999999999999', '2147483648'), '--trials': ('0', '-5'),
                               '--threads': ('0', '-1', '1000000'), '--dimensions': ('2', '5'), '--roots': ('0', '-2')}.items():
            for value in values:
                self.bad('build', FIVE_RING, '-o', 'm.pdb', f'{option}={value}', says=f'{option} takes a number from')

    def test_fewer_trials_than_models(self):
        self.bad('build', FIVE_RING, '-o', 'm.pdb', '--trials', 3, says='3 trials cannot give 20 models')

    def test_seeds(self):
        for value in ('-1', '18446744073709551616', '1.5', '+1', '', '1 '):
            self.bad('build', FIVE_RING, '-o', 'm.pdb', f'--seed={value}', says='--seed takes a whole number')

    def test_efforts(self):
        for value in ('nan', '', 'much', '1x'):
            self.bad('build', FIVE_RING, '-o', 'm.pdb', f'--effort={value}', says='--effort takes a number, not')
        for value in ('inf', '-1', '0', '1e999', '101'):
            self.bad('build', FIVE_RING, '-o', 'm.pdb', f'--effort={value}', says='--effort takes a number from')

    def test_words(self):
        self.bad('build', FIVE_RING, '-o', 'm.pdb', '--select', 'best', says='lowest or first')
        self.bad('build', FIVE_RING, '-o', 'm.pdb', '--format', 'xyz', says='pdb or cif')

    def test_build_needs_an_output_of_known_format_before_it_reads(self):
        self.bad('build', 'no-such-file', says='add -o FILE')
        self.bad('build', 'no-such-file', '-o', 'models.xyz', says='does not tell the format')
        self.bad('build', 'no-such-file', '-o', '-', says='--format')
        self.bad('build', 'no-such-file', '-o', 'm.pdb', '--format', 'cif', says='different formats')
        self.bad('build', 'no-such-file', '-o', '', says='does not tell the format')

    def test_two_outputs_in_one_place(self):
        self.bad('build', FIVE_RING, '-o', 'm.pdb', '--summary', 'm.pdb', says='cannot both go')
        self.bad('build', FIVE_RING, '-o', '-', '--format', 'pdb', '--summary', '-', says='cannot both go')

    def test_standard_input_twice(self):
        self.bad('check', '-', '-', says='only once')

    def test_an_output_that_is_an_input_or_a_folder(self):
        self.write('set.sheet', open(FIVE_RING).read())
        self.bad('bounds', 'set.sheet', '-o', './set.sheet', says='one of the inputs')
        self.bad('check', 'set.sheet', '--json', 'set.sheet', says='one of the inputs')
        self.bad('bounds', 'set.sheet', '-o', '.', says='folder')

    def test_options_after_a_double_dash_are_inputs(self):
        _, err = self.trammel('check', '--', '--strict', status=2)
        self.assertIn('--strict', err)


if __name__ == '__main__':
    harness.main()

"""The element table against two outside ones: the open element data set (symbols, numbers, an older set of radii) and the tables of
an independent structure library, whose covalent radii are Cordero et al. (Dalton Trans. (2008) 2832) and whose van der Waals radii of
main-group elements are Bondi's (J. Phys. Chem. 68 (1964) 441) and Mantina et al.'s (J. Phys. Chem. A 113 (2009) 5806).
"""
import os
import subprocess
import sys
import unittest
import xml.etree.ElementTree

import gemmi

DUMP = os.path.join(os.path.abspath(os.environ.get('TRAMMEL_BUILD', 'build')), 'oracle', 'dump_elements')
DATA = '/usr/share/bodr/elements.xml'
SCHEMA = '{http://www.xml-cml.org/schema}'
# Where the library's covalent radius is not the paper's of sp3 carbon (it has sp2), or is another element's (Lu and Hf are exchanged).
OTHER_COVALENT = {'C', 'Lu', 'Hf'}
LAST_WITH_COVALENT = 96  # Cm; the paper has no more
TRANSITION = set(range(21, 31)) | set(range(39, 49)) | set(range(57, 81)) | set(range(89, 119))


class ElementTable(unittest.TestCase):
    @classmethod
    def setUpClass(cls):
        rows = subprocess.run([DUMP], check=True, capture_output=True, text=True).stdout.splitlines()
        cls.own = {symbol: (int(number), float(vdw), float(covalent)) for number, symbol, vdw, covalent in (r.split('\t') for r in rows)}

    @unittest.skipUnless(os.path.exists(DATA), 'no element data set on this machine')
    def test_symbols_numbers_and_rough_radii_are_those_of_the_open_data_set(self):
        seen = 0
        for atom in xml.etree.ElementTree.parse(DATA).getroot().findall(SCHEMA + 'atom'):
            values = {s.get('dictRef').split(':')[1]: s.text for s in atom.findall(SCHEMA + 'scalar')}
            symbol = next(label.get('value') for label in atom.findall(SCHEMA + 'label') if label.get('dictRef') == 'bo:symbol')
            number = int(values['atomicNumber'])
            if number == 0 or symbol.startswith('Uu'):
                continue
            with self.subTest(symbol):
                self.assertEqual(self.own[symbol][0], number)
                if number <= LAST_WITH_COVALENT and 'radiusCovalent' in values:  # an older set of radii: nearness is all
                    self.assertAlmostEqual(self.own[symbol][2], float(values['radiusCovalent']), delta=0.45)
                seen += 1
        self.assertGreaterEqual(seen, 100)

    def test_covalent_radii_are_cordero_s(self):
        for symbol, (number, _, covalent) in self.own.items():
            if number <= LAST_WITH_COVALENT and symbol not in OTHER_COVALENT:
                with self.subTest(symbol):
                    self.assertAlmostEqual(covalent, gemmi.Element(symbol).covalent_r, delta=0.0051)

    def test_main_group_van_der_waals_radii_are_bondi_s_and_mantina_s(self):
        for symbol, (number, vdw, _) in self.own.items():
            if number not in TRANSITION and 1 < number <= 88:  # H: Rowland & Taylor 1.10, where Bondi has 1.20
                with self.subTest(symbol):
                    self.assertAlmostEqual(vdw, gemmi.Element(symbol).vdw_r, delta=0.0151)


def main():
    outcome = unittest.main(exit=False, argv=sys.argv[:1], testRunner=unittest.TextTestRunner(stream=sys.stdout)).result
    failed, skipped = len(outcome.failures) + len(outcome.errors), len(outcome.skipped)
    print(f'{outcome.testsRun - failed - skipped} passed, {failed} failed' + (f', {skipped} skipped' if skipped else ''))
    sys.exit(failed != 0)


if __name__ == '__main__':
    main()

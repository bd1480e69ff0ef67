"""The sheet: a compiled edition. Controls, formula trees and a flat move graph; the narrow waist of the design."""

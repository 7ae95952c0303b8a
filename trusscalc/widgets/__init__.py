"""The interactive workbook: draw a cut, see what it gives, keep what goes on file."""

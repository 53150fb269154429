"""From a Record to equations, figures, tables, pages and the register."""

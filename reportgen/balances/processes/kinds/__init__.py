"""One module for each kind of process in a closed system; see :mod:`reportgen.balances.kinds` for what it declares."""

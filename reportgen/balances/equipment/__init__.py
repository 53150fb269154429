"""The kinds of equipment, one module each; :func:`reportgen.balances.kinds.kinds` finds them."""

"""The same equations for single states, in plain floats: below about eight states the calls of numpy cost more than
the arithmetic. Whatever is out of the ordinary is left to the vectorised branch, which also words all faults.
"""

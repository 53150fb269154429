"""The sections of a report: each turns a part of the record into what its template lays out.

A section is a function of a Presenter that returns the template's context, or None when the record has nothing to
say there. ``reportgen.report.page`` lists them in the reader's order.
"""

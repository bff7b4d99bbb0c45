"""``schemas/`` as Python sees it: one source, several uses.

`arrays` holds whole columns of a stream against a contract, `frames` does it
with pandera for pandas, and ``coldwork contract`` prints it for a person. Only
`frames` imports pandas and pandera, so that the rest starts quickly.
"""

from coldwork.contracts.contract import Contract, Field
from coldwork.contracts.loader import document, documents, load, names

__all__ = ["Contract", "Field", "document", "documents", "load", "names"]

"""The fields of an NSMA WG16.99.050 file: their order, their longest lines, which must be there."""

__all__ = ["DESCRIPTIONS", "FREE", "LENGTHS", "LONGEST_POINT", "POLARISATIONS", "REQUIRED", "fit"]

LENGTHS = {  # in the order of the text; characters of the whole line, tag and comma included
    "REVNUM": 42, "REVDAT": 16, "COMNT1": 80, "COMNT2": 80, "ANTMAN": 42, "MODNUM": 42, "PATNUM": 42,
    "FILNUM": 13, "FEDORN": 13, "DESCR1": 80, "DESCR2": 80, "DESCR3": 80, "DESCR4": 80, "DESCR5": 80,
    "DTDATA": 16, "LOWFRQ": 21, "HGHFRQ": 21, "GUNITS": 15, "LWGAIN": 12, "MDGAIN": 16, "HGGAIN": 12,
    "AZWIDT": 16, "ELWIDT": 16, "CONTYP": 80, "ATVSWR": 13, "FRTOBA": 10, "ELTILT": 16, "RADCTR": 13,
    "POTOPO": 12, "MAXPOW": 17, "ANTLEN": 14, "ANTWID": 14, "ANTDEP": 14, "ANTWGT": 16, "FIELD1": 80,
    "FIELD2": 80, "FIELD3": 80, "FIELD4": 80, "FIELD5": 80, "PATTYP": 16, "NOFREQ": 10, "PATFRE": 21,
    "NUMCUT": 11, "PATCUT": 11, "POLARI": 15, "NUPOIN": 13, "FSTLST": 25, "XORIEN": 53, "YORIEN": 53,
    "ZORIEN": 53, "ENDFIL": 11,
}  # fmt: skip
LONGEST_POINT, LONGEST_COMMENT = 28, 80  # lines of a point and of a comment
REQUIRED = (
    "REVNUM", "REVDAT", "ANTMAN", "MODNUM", "LOWFRQ", "HGHFRQ", "GUNITS", "MDGAIN", "ELTILT",
    "PATTYP", "NOFREQ",
)  # fmt: skip
DESCRIPTIONS = ("DESCR1", "DESCR2", "DESCR3", "DESCR4", "DESCR5")
FREE = (  # kept as they are from file to file
    "PATNUM", "FILNUM", "FEDORN", "LWGAIN", "HGGAIN", "CONTYP", "ATVSWR", "RADCTR", "POTOPO",
    "MAXPOW", "ANTLEN", "ANTWID", "ANTDEP", "ANTWGT", "FIELD1", "FIELD2", "FIELD3", "FIELD4",
    "FIELD5",
)  # fmt: skip
POLARISATIONS = (
    "H/H", "H/V", "V/V", "V/H", "SLR/SLR", "SLR/SLL", "SLL/SLL", "SLL/SLR", "RCP/RCP", "RCP/LCP",
    "LCP/LCP", "LCP/RCP",
)  # fmt: skip


def fit(tag, value):
    """Make a field's line in ASCII (a comment's or point's for no tag), not too long; tell if it changed."""
    clean = "".join(letter if " " <= letter <= "~" else "?" for letter in value)
    row = f"{tag}:,{clean}" if tag else clean
    most = LENGTHS[tag] if tag else LONGEST_COMMENT
    return row[:most].rstrip(), len(row) > most or clean != value

"""The caution that goes with every table, wherever one is shown or written.

Why: 1 dB is 26 % in power density and 12 % in distance, a chart is often typical, far-field and one frequency
only, and a side lobe that is read too low errs on the dangerous side. Limits differ between countries and
change, so no part of this project says that a place or a direction is safe.
"""

__all__ = ["CAUTION", "CAUTION_SHORT"]

CAUTION = (
    "Values read from a picture of a chart, with the stated reading error only. "
    "The chart's own accuracy is unknown. "
    "Not for RF-exposure compliance, exclusion zones, interference coordination, licensing or aeronautical "
    "work without the maker's measured data and a competent person's review under the local rules. "
    "Do not climb, aim or approach an antenna on the strength of these values; "
    "have transmitters made safe first."
)

CAUTION_SHORT = (
    "Read from a picture: reading error only, the chart's own accuracy is unknown. "
    "Not for RF exposure, exclusion zones, interference coordination, licensing or aeronautical work. "
    "No evidence that a direction is safe."
)

"""A time-stamp token on the seal of a plan (RFC 3161), checked offline against the authorities that the base lists.

The library that checks it, rfc3161-client, is an optional dependency. It checks the hash of the stamped bytes, the
signature, the chain up to a listed certificate at the time of the stamp, and that the signer's certificate is for
time stamps alone (RFC 3161, section 2.3). Whether a certificate was revoked is not looked up.
"""

from __future__ import annotations

from datetime import datetime, timedelta
from typing import TYPE_CHECKING, cast

from gatecheck.model.struct import struct

if TYPE_CHECKING:
    from rfc3161_client import TimeStampResponse
    from rfc3161_client.tsp import Accuracy


@struct
class Stamp:
    """When a seal was there, by the clock of an authority; or why that is not shown, `unknown` where not judged."""

    at: datetime | None = None
    why: str = ""
    unknown: bool = False


def stamp_on(seal: bytes, token: bytes, authorities: bytes) -> Stamp:
    """Return the latest time at which the authority made `token`, a whole response, on the bytes of the seal.

    `authorities` holds PEM certificates.
    """
    try:
        import rfc3161_client  # noqa: PLC0415  # an optional dependency
        from cryptography.x509 import load_pem_x509_certificates  # noqa: PLC0415  # comes with it
    except ImportError:
        return Stamp(why="a time-stamp token is there, and what checks it is not installed", unknown=True)
    try:
        roots = load_pem_x509_certificates(authorities)
    except ValueError:
        return Stamp(why="the file of authorities holds no PEM certificates that can be read")
    try:
        response = rfc3161_client.decode_timestamp_response(token)
        rfc3161_client.VerifierBuilder(roots=roots).build().verify_message(response, seal)
        return Stamp(_latest(response))
    except Exception as error:  # noqa: BLE001  # whatever stops the library, nothing is shown by such bytes
        says = str(error).partition(":")[0]
        return Stamp(why=f"the time-stamp token is none on this seal by a listed authority ({ascii(says)[1:-1]})")


def _latest(response: TimeStampResponse) -> datetime:
    """The time in the token, and as much later as the authority says that its clock may be off."""
    information = response.tst_info
    off = cast("Accuracy | None", information.accuracy)  # which need not be there
    if off is None:
        return information.gen_time
    units = {"seconds": off.seconds, "milliseconds": off.millis, "microseconds": off.micros}
    return information.gen_time + timedelta(**{unit: value or 0 for unit, value in units.items()})

"""A time-stamp authority for the tests, made with openssl: its certificates are invented and its clock is ours."""

from __future__ import annotations

import subprocess
from dataclasses import dataclass
from pathlib import Path

from plans.planting import needs

_CONFIGURATION = """
[req]
distinguished_name = name
[name]
[root]
basicConstraints = critical, CA:TRUE
keyUsage = critical, keyCertSign
[stamps]
basicConstraints = critical, CA:FALSE
keyUsage = critical, digitalSignature
extendedKeyUsage = critical, timeStamping
[letters]
basicConstraints = critical, CA:FALSE
keyUsage = critical, digitalSignature
extendedKeyUsage = critical, emailProtection
[anything]
basicConstraints = critical, CA:FALSE
keyUsage = critical, digitalSignature
[meekly]
basicConstraints = critical, CA:FALSE
keyUsage = critical, digitalSignature
extendedKeyUsage = timeStamping
[authority]
serial = serial
default_policy = 1.3.6.1.4.1.99999.1
digests = sha256
signer_digest = sha256
ess_cert_id_alg = sha256
{accuracy}
"""
_TIME_STAMP = "1.2.840.113549.1.9.16.1.4"  # id-ct-TSTInfo, RFC 3161, section 2.4.2


@dataclass
class Authority:
    """An authority in a folder of its own; `root` is its certificate in PEM."""

    folder: Path

    @property
    def root(self) -> bytes:
        """The certificate that a base lists."""
        return (self.folder / "root.pem").read_bytes()

    def run(self, *arguments: str) -> None:
        """Run openssl in the folder."""
        subprocess.run(["openssl", *arguments], cwd=self.folder, check=True, capture_output=True)

    def certify(self, name: str, section: str) -> None:
        """Make a key and a certificate of this authority for it."""
        self.run("req", "-newkey", "ec", "-pkeyopt", "ec_paramgen_curve:P-256", "-nodes", "-config", "a.cnf",
                 "-keyout", f"{name}.key", "-out", f"{name}.csr", "-subj", f"/CN=Invented {name}")  # fmt: skip
        self.run("x509", "-req", "-in", f"{name}.csr", "-CA", "root.pem", "-CAkey", "root.key", "-CAcreateserial",
                 "-out", f"{name}.pem", "-days", "3650", "-extfile", "a.cnf", "-extensions", section)  # fmt: skip

    def stamp(self, content: bytes, *, with_certificate: bool = True) -> bytes:
        """The response of the authority to a request for `content`."""
        (self.folder / "content").write_bytes(content)
        wish = ["-cert"] if with_certificate else []
        self.run("ts", "-query", "-data", "content", "-sha256", *wish, "-out", "query")
        self.run("ts", "-reply", "-queryfile", "query", "-signer", "stamps.pem", "-inkey", "stamps.key", "-section",
                 "authority", "-config", "a.cnf", "-out", "reply")  # fmt: skip
        return (self.folder / "reply").read_bytes()

    def signed_again(self, reply: bytes, section: str) -> bytes:
        """The same stamp, signed with a certificate of this authority that `section` describes."""
        self.certify("again", section)
        (self.folder / "reply").write_bytes(reply)
        self.run("ts", "-reply", "-in", "reply", "-token_out", "-out", "token")
        self.run("cms", "-verify", "-noverify", "-inform", "DER", "-in", "token", "-out", "information")
        self.run("cms", "-sign", "-binary", "-nodetach", "-econtent_type", _TIME_STAMP, "-in", "information",
                 "-signer", "again.pem", "-inkey", "again.key", "-outform", "DER", "-out", "token")  # fmt: skip
        token = (self.folder / "token").read_bytes()
        body = b"\x30\x03\x02\x01\x00" + token  # PKIStatusInfo with granted (0), then the token
        return b"\x30\x82" + len(body).to_bytes(2, "big") + body


def authority(folder: Path, accuracy: str = "accuracy = secs:2, millisecs:500") -> Authority:
    """A new authority in `folder`."""
    needs("openssl")
    folder.mkdir()
    made = Authority(folder)
    (folder / "a.cnf").write_text(_CONFIGURATION.format(accuracy=accuracy), encoding="ascii")
    (folder / "serial").write_text("01\n", encoding="ascii")
    made.run("req", "-x509", "-newkey", "ec", "-pkeyopt", "ec_paramgen_curve:P-256", "-nodes", "-config", "a.cnf",
             "-keyout", "root.key", "-out", "root.pem", "-days", "3650", "-subj", "/CN=Invented root",
             "-extensions", "root")  # fmt: skip
    made.certify("stamps", "stamps")
    return made

"""Time-stamp tokens on seals, from an authority of the tests' own; all is checked offline."""

from __future__ import annotations

import random
import re
import sys
from datetime import UTC, datetime, timedelta
from pathlib import Path

import pytest
from plans.planting import FILE, SEAL, STAMP, Station, fresh, record
from plans.signing import SIGNERS, allowed, key, signing
from plans.stamping import Authority, authority
from support import git

from gatecheck.model.plan_settings import PlanSettings
from gatecheck.plans.stamps import stamp_on

AUTHORITIES = "keys/authorities.pem"
LATER = "2099-01-01T00:00:00Z"


@pytest.fixture(scope="module")
def clock(tmp_path_factory: pytest.TempPathFactory) -> Authority:
    return authority(tmp_path_factory.mktemp("clock") / "authority")


@pytest.fixture
def stamped(station: Station, clock: Authority) -> Station:
    """A station whose base lists the authority, with a sealed plan and a token on its seal."""
    station.settings = PlanSettings(authorities=AUTHORITIES)
    station.put(AUTHORITIES, clock.root)
    station.plan()
    station.put(STAMP, clock.stamp((station.root / SEAL).read_bytes()))
    return station


def put_data(station: Station, monkeypatch: pytest.MonkeyPatch, date: str = LATER) -> str:
    """Commit the data with that date."""
    monkeypatch.setenv("GIT_COMMITTER_DATE", date)
    commit = station.data()
    monkeypatch.delenv("GIT_COMMITTER_DATE")
    return commit


def test_a_token_on_the_seal(stamped: Station, monkeypatch: pytest.MonkeyPatch) -> None:
    before = datetime.now(UTC).replace(microsecond=0) - timedelta(minutes=5)
    data = put_data(stamped, monkeypatch)

    graded = stamped.grade()
    assert graded.grade == "third-party-time"
    told = re.fullmatch(
        rf"sealed in [0-9a-f]{{12}} on the base's first-parent line, before {data[:12]} first added data/plots\.csv"
        rf"; a listed authority stamped the seal by ([-0-9T:]+Z), and {data[:12]} is of 2099-01-01T00:00:00Z by "
        r"its committer's own clock; that the seal was there by then holds unless that authority stamped a false "
        r"time, and that the data were not, unless someone with the right to push rewrote that branch",
        graded.because,
    )
    assert told is not None, graded.because
    assert before < datetime.fromisoformat(told[1]) < datetime.now(UTC) + timedelta(seconds=5)


def test_the_time_is_the_latest_that_the_authority_allows_for(clock: Authority, tmp_path: Path) -> None:
    """The accuracy in the token is 2.5 seconds here; an authority need not say any (RFC 3161, section 2.4.2)."""
    import rfc3161_client  # noqa: PLC0415

    token, plain = clock.stamp(b"seal"), authority(tmp_path / "plain", "").stamp(b"seal")
    stamp = stamp_on(b"seal", token, clock.root)
    bare = stamp_on(b"seal", plain, (tmp_path / "plain/root.pem").read_bytes())

    assert stamp.at == rfc3161_client.decode_timestamp_response(token).tst_info.gen_time + timedelta(seconds=2.5)
    assert bare.at == rfc3161_client.decode_timestamp_response(plain).tst_info.gen_time


def test_while_the_base_has_no_data(stamped: Station) -> None:
    assert stamped.grade().grade == "third-party-time"
    assert "which holds none of its data and results yet; a listed authority stamped the seal by " in (
        stamped.grade().because
    )


@pytest.mark.parametrize(
    ("made_at", "grade"),
    [
        ("2099-01-01T00:00:00Z", "third-party-time"),
        ("2001-01-01T00:00:00", "repository-order"),
        ("2001-01-01", "repository-order"),
        ("in spring", "third-party-time"),
        ("0001-01-01T00:00:00+14:00", "third-party-time"),
    ],
)
def test_results_that_say_that_they_were_made_earlier(stamped: Station, made_at: str, grade: str) -> None:
    promise = stamped.promise(record(provenance__made_at=made_at))

    assert promise.grade == grade
    if grade == "repository-order":
        assert promise.because.endswith(
            ", which is not before: the results are of 2001-01-01T00:00:00Z by their own word"
        )


@pytest.mark.parametrize(
    ("date", "shown"), [("2001-01-01T00:00:00Z", "2001-01-01T00:00:00Z"), ("@0 +0000", "1970-01-01T00:00:00Z")]
)
def test_a_stamp_after_the_first_data(
    stamped: Station, monkeypatch: pytest.MonkeyPatch, date: str, shown: str
) -> None:
    data = put_data(stamped, monkeypatch, date)

    graded = stamped.grade()
    assert graded.grade == "repository-order"
    assert graded.because.endswith(f", which is not before: {data[:12]} is of {shown} by its committer's own clock")


def test_a_commit_of_a_time_beyond_all_calendars(stamped: Station, monkeypatch: pytest.MonkeyPatch) -> None:
    put_data(stamped, monkeypatch, "@99999999999999 +0000")

    assert stamped.grade().grade == "third-party-time"
    assert "is of 9999-01-01T00:00:00Z by its committer's own clock" in stamped.grade().because


def test_a_token_on_another_seal(station: Station, stamped: Station, clock: Authority) -> None:
    stamped.put(STAMP, clock.stamp(b"another seal"))

    graded = station.grade()
    assert graded.grade == "repository-order"
    assert graded.because.endswith(
        "; the time-stamp token is none on this seal by a listed authority (Mismatch between messages)"
    )


def test_a_token_by_another_authority(stamped: Station, tmp_path: Path) -> None:
    other = authority(tmp_path / "other")
    stamped.put(STAMP, other.stamp((stamped.root / SEAL).read_bytes()))

    graded = stamped.grade()
    assert graded.grade == "repository-order"
    assert graded.because.endswith(
        "; the time-stamp token is none on this seal by a listed authority (Error while verifying certificates)"
    )


@pytest.mark.parametrize(
    ("purpose", "holds"), [("stamps", True), ("letters", False), ("anything", False), ("meekly", False)]
)
def test_the_certificate_must_be_for_stamps_alone(clock: Authority, purpose: str, holds: bool) -> None:
    """RFC 3161, section 2.3: its purpose is time stamps, which a critical extension says. The first one does."""
    token = clock.stamp(b"seal")

    stamp = stamp_on(b"seal", clock.signed_again(token, purpose), clock.root)
    assert (stamp.at is not None, stamp.unknown) == (holds, False)
    assert stamp.at == (stamp_on(b"seal", token, clock.root).at if holds else None)


def test_a_token_without_its_certificate_does_not_hold(clock: Authority) -> None:
    stamp = stamp_on(b"seal", clock.stamp(b"seal", with_certificate=False), clock.root)

    assert stamp.at is None
    assert stamp.why.startswith("the time-stamp token is none on this seal by a listed authority")


def test_no_changed_byte_of_a_token_moves_its_time(clock: Authority) -> None:
    """Over 600 tokens with a byte or two replaced or an end cut off: no other time, and no other exception."""
    token = clock.stamp(b"seal")
    true = stamp_on(b"seal", token, clock.root).at
    random_ = random.Random(20310402)  # noqa: S311  # a seed that can be repeated
    times = []
    for _ in range(600):
        forged = bytearray(token)
        for _ in range(random_.randrange(1, 3)):
            forged[random_.randrange(len(forged))] = random_.randrange(256)
        if random_.random() < 0.1:
            del forged[random_.randrange(len(forged)) :]
        times.append(stamp_on(b"seal", bytes(forged), clock.root).at)
    assert true is not None
    assert set(times) <= {true, None}
    assert times.count(None) > 500


def test_the_policy_names_no_authorities(stamped: Station) -> None:
    stamped.settings = PlanSettings()

    assert stamped.grade().grade == "repository-order"
    assert stamped.grade().because.endswith("; a time-stamp token is there, and the policy names no authorities")


def test_authorities_are_those_of_the_base(stamped: Station, clock: Authority) -> None:
    stamped.settings = PlanSettings(authorities="keys/more.pem")
    git(stamped.root, "checkout", "-q", "-b", "study")
    stamped.put("keys/more.pem", clock.root)

    assert stamped.grade(revision="study").grade == "third-party-time"
    on_base = stamped.grade(revision="main")
    assert on_base.grade == "repository-order"
    assert on_base.because.endswith(
        "; a time-stamp token is there, and the file of authorities keys/more.pem is not on the base"
    )


def test_authorities_that_are_no_certificates(stamped: Station) -> None:
    stamped.put(AUTHORITIES, "a list of friends\n")

    assert stamped.grade().grade == "repository-order"
    assert stamped.grade().because.endswith("; the file of authorities holds no PEM certificates that can be read")


def test_a_token_that_is_a_link(stamped: Station) -> None:
    (stamped.root / STAMP).unlink()
    (stamped.root / STAMP).symlink_to("elsewhere.tsr")
    stamped.commit()

    assert stamped.grade().grade == "repository-order"
    assert "; its time-stamp token cannot be read: " in stamped.grade().because


def test_without_the_library_it_is_not_known(stamped: Station, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setitem(sys.modules, "rfc3161_client", None)

    graded = stamped.grade()
    assert (graded.grade, graded.at_least) == (None, "repository-order")
    assert graded.because.endswith("; a time-stamp token is there, and what checks it is not installed")
    assert graded.advice == "run `pip install 'gatecheck-evidence[time]'`"


def test_without_the_library_a_signature_is_the_least(
    stamped: Station, tmp_path: Path, monkeypatch: pytest.MonkeyPatch
) -> None:
    pair = key(tmp_path)
    stamped.settings = PlanSettings(authorities=AUTHORITIES, signers=SIGNERS)
    stamped.put(SIGNERS, allowed(pair))
    signing(stamped, pair, "tag", "-s", "-m", "registered", "drainage-plan")
    assert stamped.grade().grade == "third-party-time"
    monkeypatch.setitem(sys.modules, "rfc3161_client", None)

    graded = stamped.grade()
    assert (graded.grade, graded.at_least) == (None, "signed")


def test_a_stamp_does_not_replace_the_order(stamped: Station, clock: Authority, tmp_path: Path) -> None:
    """Plan and data in one commit: that the plan is older than the commit does not show that the data are not."""
    station = fresh(tmp_path / "squashed")
    station.settings = stamped.settings
    station.put(AUTHORITIES, clock.root)
    station.write("data/plots.csv", "1\n")
    for path in (FILE, SEAL, STAMP):
        station.write(path, (stamped.root / path).read_bytes())
    station.commit()

    assert station.grade().grade == "self-declared"

"""Codes against the published test values."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from plant.accounts import totp

# RFC 4226, appendix D: secret and the first ten codes.
RFC4226 = ["755224", "287082", "359152", "969429", "338314", "254676", "287922", "162583", "399871", "520489"]
# RFC 6238, appendix B: seconds, and the codes for SHA-1, SHA-256, SHA-512 (secrets of 20, 32 and 64 bytes).
RFC6238 = [
    (59, "94287082", "46119246", "90693936"),
    (1111111109, "07081804", "68084774", "25091201"),
    (1111111111, "14050471", "67062674", "99943326"),
    (1234567890, "89005924", "91819424", "93441116"),
    (2000000000, "69279037", "90698825", "38618901"),
    (20000000000, "65353130", "77737706", "47863826"),
]
SECRET = b"12345678901234567890"


@pytest.mark.parametrize(("counter", "code"), list(enumerate(RFC4226)))
def test_hotp_as_published(counter, code):
    assert totp.hotp(SECRET, counter) == code


@pytest.mark.parametrize(("seconds", "sha1", "sha256", "sha512"), RFC6238)
def test_totp_as_published(seconds, sha1, sha256, sha512):
    for algorithm, length, code in (("sha1", 20, sha1), ("sha256", 32, sha256), ("sha512", 64, sha512)):
        secret = (SECRET * 4)[:length]
        assert totp.hotp(secret, totp.step_at(seconds), digits=8, algorithm=algorithm) == code


@given(st.binary(min_size=20, max_size=20), st.integers(10**9, 2 * 10**9))
def test_the_code_of_now_and_of_a_step_to_each_side_fits(secret, seconds):
    step = totp.step_at(seconds)
    for drift in (-1, 0, 1):
        assert totp.matching_step(secret, totp.hotp(secret, step + drift), seconds) is not None


def test_older_and_later_codes_do_not_fit():
    step = totp.step_at(1234567890)
    for drift in (-3, -2, 2, 3):
        assert totp.matching_step(SECRET, totp.hotp(SECRET, step + drift), 1234567890) is None


def test_a_used_code_does_not_fit_again():
    step = totp.step_at(1234567890)
    code = totp.hotp(SECRET, step)
    assert totp.matching_step(SECRET, code, 1234567890) == step
    assert totp.matching_step(SECRET, code, 1234567890, after_step=step) is None


@pytest.mark.parametrize("typed", ["", "abc", "12345", "١٢٣٤٥٦", "1" * 400])
def test_rubbish_is_refused(typed):
    assert totp.matching_step(SECRET, typed, 1234567890) is None


def test_spaces_as_telephones_show_them_are_fine():
    code = totp.hotp(SECRET, totp.step_at(59))
    assert totp.matching_step(SECRET, f"{code[:3]} {code[3:]}", 59) == 1


def test_the_key_is_typed_in_groups():
    assert totp.in_base32(SECRET) == "GEZD GNBV GY3T QOJQ GEZD GNBV GY3T QOJQ"

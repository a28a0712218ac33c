"""Writes the corpus of refused payloads beside this file.

Payloads are built with cbor2, struct and base64, and every expected offset is found here by searching the payload
for the bytes at fault, so neither comes from the code under test. Run: python write.py (needs cbor2).
Each line is one case: name, reason, offset, key or -, payload as hex:… or text:… to the end of the line.
"""

import base64
import pathlib
import struct

import cbor2

HERE = pathlib.Path(__file__).parent
FILES = {}
AT = 1_796_094_480_250_000_000


def case(file, name, reason, key, payload, offset):
    payload = payload if isinstance(payload, bytes) else payload.encode()
    assert 0 <= offset <= len(payload), (name, offset)
    lines = FILES.setdefault(file, {})
    assert name not in lines, name
    plain = all(0x20 <= b < 0x7F for b in payload) and payload and not file.endswith("cbor")
    shown = "text:" + payload.decode() if plain else "hex:" + payload.hex()
    lines[name] = f"{name} {reason} {offset} {key or '-'} {shown}"


def at(payload, part, skip=0):
    """Where `part` starts in the payload, which must hold it once."""
    part = part if isinstance(part, bytes) else part.encode()
    payload = payload if isinstance(payload, bytes) else payload.encode()
    assert payload.count(part) == 1, (payload, part)
    return payload.index(part) + skip


# ---------------------------------------------------------------- CBOR blocks

def typed(tag, data):
    return cbor2.dumps(cbor2.CBORTag(tag, data))


S16 = typed(77, struct.pack("<4h", 1, -2, 3, -4))
GOOD = {
    "at": cbor2.dumps(AT),
    "rate": cbor2.dumps(25600),
    "unit": cbor2.dumps("g"),
    "scale": cbor2.dumps(0.001),
    "samples": S16,
}


def cmap(**changes):
    """A CBOR block with changed, added or (None) removed entries, values as encoded bytes."""
    entries = {**GOOD, **changes}
    entries = {k: v for k, v in entries.items() if v is not None}
    return bytes([0xA0 + len(entries)]) + b"".join(cbor2.dumps(k) + v for k, v in entries.items())


def value_at(payload, key):
    name = cbor2.dumps(key)
    return at(payload, name, len(name))


def ccase(name, reason, key, offset=None, skip=0, file="block-cbor", **changes):
    payload = cmap(**changes)
    if offset is None:
        offset = value_at(payload, key) + skip
    case(file, name, reason, key, payload, offset)


F = "block-cbor"
good = cmap()
case(F, "nothing", "empty", None, b"", 0)
case(F, "nothing_again", "empty", None, b"", 0)
case(F, "cut_in_the_samples", "truncated", None, good[:-3], len(good) - 3)
case(F, "cut_in_a_key", "truncated", None, good[:3], 3)
case(F, "only_a_head", "truncated", None, good[:1], 1)
lie = cmap(samples=b"\xd8\x4d\x5b\x00\x00\x00\xff\xff\xff\xff\xff" + b"\0\0")
case(F, "length_of_a_tebibyte", "truncated", None, lie, len(lie))
lie = cmap(extra=b"\x9b\xff\xff\xff\xff\xff\xff\xff\xff\x01")
case(F, "array_of_2_to_the_64", "truncated", None, lie, len(lie))
bad = cmap(rate=b"\x1c")
case(F, "reserved_head_28", "bad_syntax", None, bad, value_at(bad, "rate"))
bad = cmap(extra=b"\xff")
case(F, "break_without_a_start", "bad_syntax", None, bad, value_at(bad, "extra"))
bad = cmap(extra=b"\xf8\x10")
case(F, "simple_value_in_two_bytes", "bad_syntax", None, bad, value_at(bad, "extra"))
case(F, "a_byte_behind", "trailing_bytes", None, good + b"\0", len(good))
case(F, "a_second_block_behind", "trailing_bytes", None, good + good, len(good))
case(F, "map_without_length", "indefinite_length", None, b"\xbf" + good[1:] + b"\xff", 0)
bad = cmap(samples=b"\x9f\x01\x02\xff")
case(F, "samples_without_length", "indefinite_length", None, bad, value_at(bad, "samples"))
bad = cmap(extra=b"\x7f\x61a\xff")
case(F, "other_text_without_length", "indefinite_length", None, bad, value_at(bad, "extra"))
bad = cmap(extra=b"\x81" * 16 + b"\x80")
case(F, "seventeen_arrays", "too_deep", None, bad, value_at(bad, "extra") + 16)
bad = cmap(samples=b"\x81" * 500_0 + b"\x00")
case(F, "five_thousand_arrays", "too_deep", None, bad, value_at(bad, "samples") + 17 - 1)
bad = cmap(extra=b"\xa1\x61a" * 16 + b"\xa0")
case(F, "seventeen_maps", "too_deep", None, bad, value_at(bad, "extra") + 48)
bad = cmap(unit=b"\x62\x67\xff")
case(F, "unit_that_is_not_utf8", "invalid_text", None, bad, value_at(bad, "unit") + 2)
bad = cmap(extra=b"\x63\xe2\x82\x28")
case(F, "other_text_that_is_not_utf8", "invalid_text", None, bad, value_at(bad, "extra") + 1)
ccase("rate_as_text", "wrong_type", "rate", rate=cbor2.dumps("25600"))
ccase("at_as_float", "wrong_type", "at", at=cbor2.dumps(1.5e18))
ccase("samples_as_bytes_without_tag", "wrong_type", "samples", samples=cbor2.dumps(b"\0\0"))
ccase("samples_as_text", "wrong_type", "samples", samples=cbor2.dumps("AAAA"))
ccase("a_sample_as_text", "wrong_type", "samples", skip=2, samples=b"\x83\x01\x61x\x02")
ccase("seq_as_float", "wrong_type", "seq", seq=cbor2.dumps(3.0))
ccase("seq_as_bignum", "wrong_type", "seq", seq=cbor2.dumps(2**70))
case(F, "an_array_instead_of_a_map", "wrong_type", None, b"\x80", 0)
for key in ("at", "rate", "unit", "samples", "scale"):
    ccase(f"no_{key}", "missing_key", key, offset=0, **{key: None})
ccase("rate_is_null", "missing_key", "rate", offset=0, rate=b"\xf6")
for key, value in (("seq", b"\x01"), ("samples", S16)):
    twice = bytes([0xA7]) + cmap(seq=b"\x05")[1:] + cbor2.dumps(key) + value
    case(F, f"{key}_twice", "duplicate_key", key, twice, twice.rindex(cbor2.dumps(key)))
ccase("at_without_offset", "bad_time", "at", at=cbor2.dumps("2026-12-01T03:08:00"))
ccase("at_in_month_13", "bad_time", "at", at=b"\xc0" + cbor2.dumps("2026-13-01T03:08:00Z"))
ccase("at_in_1999", "time_out_of_range", "at", at=cbor2.dumps("1999-12-31T23:59:59.999Z"))
ccase("at_in_seconds", "time_out_of_range", "at", at=cbor2.dumps(1_796_094_480))
ccase("at_beyond_64_bits", "time_out_of_range", "at", at=cbor2.dumps(2**64 - 1))
ccase("rate_is_nan", "out_of_range", "rate", rate=b"\xf9\x7e\x00")
ccase("rate_is_infinite", "out_of_range", "rate", rate=b"\xf9\x7c\x00")
ccase("rate_is_zero", "out_of_range", "rate", rate=b"\x00")
ccase("rate_above_a_megahertz", "out_of_range", "rate", rate=cbor2.dumps(1_000_001))
ccase("scale_is_zero", "out_of_range", "scale", scale=b"\x00")
ccase("channels_is_zero", "out_of_range", "channels", channels=b"\x00")
ccase("channels_is_five", "out_of_range", "channels", channels=b"\x05")
ccase("rpm_is_negative", "out_of_range", "rpm", rpm=cbor2.dumps(-1.0))
ccase("bias_is_nan", "out_of_range", "bias", bias=b"\xfa\x7f\xc0\x00\x00")
ccase("seq_is_negative", "out_of_range", "seq", seq=b"\x20")
ccase("unit_in_capitals", "unknown_unit", "unit", unit=cbor2.dumps("G"))
ccase("unit_of_velocity", "unknown_unit", "unit", unit=cbor2.dumps("mm/s"))
ccase("unsigned_samples", "unknown_samples", "samples", samples=typed(69, b"\0\0"))
ccase("samples_of_64_bits", "unknown_samples", "samples", samples=typed(79, b"\0" * 8))
ccase("half_a_sample_more", "partial_sample", "samples", skip=3 + 4, samples=typed(77, b"\0" * 5))
ccase("less_than_one_sample", "partial_sample", "samples", skip=3, samples=typed(86, b"\0" * 7))
ccase("no_typed_samples", "no_samples", "samples", samples=typed(85, b""))
ccase("no_plain_samples", "no_samples", "samples", samples=b"\x80")
ccase("typed_samples_beyond_the_limit", "too_many_samples", "samples", samples=typed(77, b"\0\0" * 65))
ccase("plain_samples_beyond_the_limit", "too_many_samples", "samples", samples=cbor2.dumps([0] * 65))
ccase("four_samples_of_three_channels", "uneven_channels", "samples", channels=b"\x03")
ccase("one_sample_of_two_channels", "uneven_channels", "samples", channels=b"\x02", samples=b"\x81\x01")
ccase("f32_nan", "sample_not_finite", "samples", skip=3 + 4, samples=typed(85, struct.pack("<3f", 1, float("nan"), 2)))
ccase("f64be_minus_infinity", "sample_not_finite", "samples", skip=4 + 16,
      samples=typed(82, struct.pack(">3d", 1, 2, float("-inf"))))
ccase("plain_half_infinity", "sample_not_finite", "samples", skip=2, samples=b"\x83\x01\xf9\x7c\x00\x02")
ccase("f64_beyond_f32", "sample_out_of_range", "samples", skip=3 + 8, samples=typed(86, struct.pack("<2d", 1, 1e39)))
ccase("plain_double_beyond_f32", "sample_out_of_range", "samples", skip=2, samples=b"\x82\x01" + cbor2.dumps(-1e39))
ccase("a_tera_g", "sample_out_of_range", "samples", skip=3 + 2, scale=cbor2.dumps(1e9),
      samples=typed(77, struct.pack("<2h", 1000, 1001)))

# ---------------------------------------------------------------- JSON blocks

JGOOD = {"at": str(AT), "rate": "25600", "unit": '"g"', "scale": "0.001", "samples": "[1,-2,3,-4]"}


def b64(fmt, *values):
    return '"' + base64.b64encode(struct.pack(fmt, *values)).decode() + '"'


def jmap(good=JGOOD, names=None, around=("{", "}"), **changes):
    entries = {**good, **changes}
    names = names or {}
    inside = ", ".join(f'"{names.get(k, k)}": {v}' for k, v in entries.items() if v is not None)
    return around[0] + inside + around[1]


def json_cases(file, write, name_of, first, keys_missing):
    """The cases JSON shares between our own keys and mapped ones; `write` builds, `first` is the object's start."""

    def jcase(name, reason, key, offset=None, skip=0, told=True, **changes):
        payload = write(**changes)
        if offset is None:
            offset = at(payload, f'"{name_of(key)}": ', len(f'"{name_of(key)}": ')) + skip
        case(file, name, reason, key if told else None, payload, offset)

    good = write()
    case(file, "nothing", "empty", None, b"", 0)
    case(file, "nothing_again", "empty", None, b"", 0)
    case(file, "cut_in_the_samples", "truncated", None, good[:-3], len(good) - 3)
    case(file, "cut_in_a_key", "truncated", None, good[:4], 4)
    for name, end in (("sign", good.index("-2") + 1), ("point", good.index("0.001") + 2)):
        case(file, f"cut_behind_a_{name}", "truncated", None, good[:end], end)
    bad = write(rate="025600")
    case(file, "a_leading_zero", "bad_syntax", None, bad, at(bad, "025600", 1))
    bad = write(samples="[1,,2]")
    case(file, "two_commas", "bad_syntax", None, bad, at(bad, "[1,,2]", 3))
    bad = write(samples="[1,NaN]")
    case(file, "not_a_number", "bad_syntax", None, bad, at(bad, "NaN"))
    case(file, "no_colon", "bad_syntax", None, '{\n  "at" 1}', 9)
    case(file, "a_word_behind", "trailing_bytes", None, good + " more", len(good) + 1)
    case(file, "a_second_block_behind", "trailing_bytes", None, good + good, len(good))
    bad = write(extra="[" * 17 + "]" * 17)
    case(file, "seventeen_arrays", "too_deep", None, bad, at(bad, '"extra": ', 9) + 16)
    bad = write(extra='{"a":' * 1000 + "1" + "}" * 1000)
    case(file, "a_thousand_objects", "too_deep", None, bad, at(bad, '"extra": ', 9) + 5 * 16)
    bad = write().encode().replace(b'"g"', b'"\xff"')
    case(file, "unit_that_is_not_utf8", "invalid_text", None, bad, at(bad, b"\xff"))
    bad = write(extra='"\\"').encode().replace(b'\\"', b"\xe2\x28")
    case(file, "other_text_that_is_not_utf8", "invalid_text", None, bad, at(bad, b"\xe2"))
    jcase("half_a_surrogate", "invalid_text", "unit", told=False, unit='"\\ud800"')
    jcase("rate_as_text", "wrong_type", "rate", rate='"25600"')
    jcase("a_sample_as_text", "wrong_type", "samples", skip=3, samples='[1,"2"]')
    jcase("a_sample_missing", "wrong_type", "samples", skip=4, samples="[1, null]")
    jcase("samples_nested", "wrong_type", "samples", skip=1, samples="[[1,2],[3,4]]")
    jcase("samples_as_object", "wrong_type", "samples", samples="{}")
    jcase("seq_with_a_fraction", "wrong_type", "seq", seq="1.0")
    case(file, "an_array_instead_of_an_object", "wrong_type", None, " [1]", 1)
    for key in keys_missing:
        jcase(f"no_{key}", "missing_key", key, offset=0, **{key: None})
    jcase("samples_are_null", "missing_key", "samples", offset=0, samples="null")
    jcase("base64_without_encoding", "missing_key", "encoding", offset=0, samples='"AAAA"')
    for key, value in (("seq", "1"), ("samples", "[1]")):
        name = name_of(key)
        whole = write(seq="5")
        body = whole.rstrip("}")
        twice = f'{body}, "{name}": {value}' + whole[len(body):]
        case(file, f"{key}_twice", "duplicate_key", key, twice, twice.rindex(f'"{name}"'))
    jcase("at_without_offset", "bad_time", "at", at='"2026-12-01T03:08:00"')
    jcase("at_in_words", "bad_time", "at", at='"now"')
    jcase("at_in_1999", "time_out_of_range", "at", at='"1999-12-31T23:59:59.999Z"')
    jcase("at_in_2200", "time_out_of_range", "at", at='"2200-01-01T00:00:00Z"')
    jcase("at_is_zero", "time_out_of_range", "at", at="0")
    jcase("rate_is_negative", "out_of_range", "rate", rate="-25600")
    jcase("rate_beyond_any_number", "out_of_range", "rate", rate="1e999")
    jcase("scale_is_zero", "out_of_range", "scale", scale="0.0")
    jcase("channels_is_five", "out_of_range", "channels", channels="5")
    jcase("seq_beyond_64_bits", "out_of_range", "seq", seq="18446744073709551616")
    jcase("unit_in_words", "unknown_unit", "unit", unit='"gravity"')
    jcase("unit_with_a_superscript", "unknown_unit", "unit", unit='"m/s\\u00b2"')
    jcase("encoding_of_8_bits", "unknown_samples", "encoding", encoding='"s8"')
    jcase("encoding_in_capitals", "unknown_samples", "encoding", encoding='"S16LE"', samples='"AAAA"')
    jcase("base64_with_a_space", "bad_base64", "samples", skip=1 + 2, encoding='"s16le"', samples='"AA AA"')
    jcase("base64_of_five_characters", "bad_base64", "samples", skip=1 + 5, encoding='"s16le"', samples='"AAAAA"')
    jcase("half_a_sample_more", "partial_sample", "samples", encoding='"s16le"', samples=b64("3b", 1, 2, 3))
    jcase("less_than_one_sample", "partial_sample", "samples", encoding='"f64be"', samples=b64("7b", *range(7)))
    jcase("no_numbers", "no_samples", "samples", samples="[ ]")
    jcase("no_base64", "no_samples", "samples", encoding='"f32le"', samples='""')
    jcase("numbers_beyond_the_limit", "too_many_samples", "samples", samples="[" + ",".join("0" * 65) + "]")
    jcase("base64_beyond_the_limit", "too_many_samples", "samples", encoding='"s16be"', samples=b64("65h", *[0] * 65))
    jcase("base64_far_beyond_the_limit", "too_many_samples", "samples", encoding='"s16be"',
          samples='"' + "A" * 1000 + '"')
    jcase("four_samples_of_three_channels", "uneven_channels", "samples", channels="3")
    jcase("one_sample_of_two_channels", "uneven_channels", "samples", channels="2", samples="[1]")
    # Sample 1 of a 32-bit type starts at byte 4, in the second group of four characters; sample 2 at byte 16.
    jcase("base64_f32_nan", "sample_not_finite", "samples", skip=1 + 4, encoding='"f32le"',
          samples=b64("<3f", 1, float("nan"), 2))
    jcase("base64_f64_infinity", "sample_not_finite", "samples", skip=1 + 20, encoding='"f64be"',
          samples=b64(">3d", 1, 2, float("inf")))
    jcase("a_number_beyond_f32", "sample_out_of_range", "samples", skip=3, samples="[1,1e39]")
    jcase("base64_f64_beyond_f32", "sample_out_of_range", "samples", skip=1 + 8, encoding='"f64le"',
          samples=b64("<2d", 1, -1e39))
    jcase("a_tera_g", "sample_out_of_range", "samples", skip=7, scale="1e9", samples="[1000, 1001, -5]")


json_cases("block-json", jmap, lambda key: key, 0, ["at", "rate", "unit", "samples"])
bad = jmap(encoding='"s16le"', samples='"AAA="', scale=None)
case("block-json", "no_scale_for_integers", "missing_key", "scale", bad, 0)

# ---------------------------------------------------------------- mapped JSON blocks
# Pointers: /h/<name> with the names below; nothing fixed but what manifest.txt says.
NAMES = {"at": "t", "seq": "n", "rate": "fs", "unit": "u", "scale": "k", "samples": "v", "encoding": "e",
         "channels": "c", "rpm": "rev", "bias": "b"}


def mapped(**changes):
    return jmap(names=NAMES, around=('{"x": [1, {"y": 2}], "h": {', '}}'), **changes)


json_cases("block-mapped", mapped, lambda key: NAMES.get(key, key), 0, ["at", "rate", "unit", "samples"])
# With integer milliseconds, fixed rate, unit, scale and packing, and a pointer into an array.
F = "block-mapped-fixed"
case(F, "time_in_seconds_where_milliseconds_are_due", "time_out_of_range", "at",
     bad := '{"t": 1796094480, "d": ["AAAA"]}', at(bad, "1796094480"))
case(F, "a_pointer_that_leads_nowhere", "missing_key", "samples", '{"t": 1796094480250, "d": []}', 0)
case(F, "text_that_is_not_base64", "bad_base64", "samples", bad := '{"t": 1796094480250, "d": ["AA*A"]}', at(bad, "*"))
case(F, "an_object_where_an_array_is_due", "missing_key", "samples", '{"t": 1796094480250, "d": {"1": "AAAA"}}', 0)

# ---------------------------------------------------------------- raw blocks
# block-raw: s16le behind 4 bytes of header, 2 channels, scale 0.5. block-raw-time: f64be, time in µs at byte 2 of 10.
F = "block-raw"
case(F, "nothing", "empty", None, b"", 0)
case(F, "less_than_the_header", "truncated", None, b"\1\2\3", 3)
case(F, "half_a_sample_more", "partial_sample", "samples", b"hdr." + b"\1\0" * 2 + b"\7", 8)
case(F, "only_the_header", "no_samples", "samples", b"hdr.", 4)
case(F, "samples_beyond_the_limit", "too_many_samples", "samples", b"hdr." + b"\0\0" * 66, 4)
case(F, "an_axis_missing", "uneven_channels", "samples", b"hdr." + b"\1\0" * 3, 4)
F = "block-raw-time"
US = struct.pack(">Q", AT // 1000)
case(F, "nothing", "empty", None, b"", 0)
case(F, "less_than_the_time", "truncated", None, b"hh" + US[:5], 7)
case(F, "at_is_zero", "time_out_of_range", "at", b"hh" + b"\0" * 8 + struct.pack(">d", 1), 2)
case(F, "at_beyond_64_bits", "time_out_of_range", "at", b"hh" + b"\xff" * 8 + struct.pack(">d", 1), 2)
case(F, "half_a_sample_more", "partial_sample", "samples", b"hh" + US + struct.pack(">d", 1) + b"\0" * 4, 18)
case(F, "only_the_header", "no_samples", "samples", b"hh" + US, 10)
case(F, "samples_beyond_the_limit", "too_many_samples", "samples", b"hh" + US + b"\0" * 8 * 65, 10)
case(F, "an_axis_missing", "uneven_channels", "samples", b"hh" + US + b"\0" * 8 * 5, 10)
for name, reason, value in (("nan", "sample_not_finite", float("nan")), ("infinity", "sample_not_finite", float("inf")),
                            ("beyond_f32", "sample_out_of_range", 1e39), ("a_tera", "sample_out_of_range", 1.1e12)):
    case(F, name, reason, "samples", b"hh" + US + struct.pack(">3d", 1, value, 2) + b"\0" * 8, 18)

# ---------------------------------------------------------------- first byte unknown
for kind in ("block", "speed", "process", "command"):
    case(f"{kind}-undetected", "nothing", "empty", None, b"", 0)
    case(f"{kind}-undetected", "a_cbor_array", "unknown_encoding", None, b"\x82\x01\x02", 0)
    case(f"{kind}-undetected", "words", "unknown_encoding", None, "hello", 0)
    case(f"{kind}-undetected", "byte_order_mark", "unknown_encoding", None, b"\xef\xbb\xbf{}", 0)

# ---------------------------------------------------------------- speeds, process values, commands
for form, write in (("json", lambda d: __import__("json").dumps(d)), ("cbor", lambda d: cbor2.dumps(d))):
    def place(payload, key, form=form):
        name = f'"{key}": ' if form == "json" else cbor2.dumps(key)
        return at(payload, name, len(name))

    def scase(kind, name, reason, key, value, offset=None):
        payload = write(value)
        case(f"{kind}-{form}", name, reason, key, payload, place(payload, key) if offset is None else offset)

    scase("speed", "shaft_with_a_slash", "bad_id", "shaft", {"rpm": 1, "shaft": "a/b"})
    scase("speed", "no_rpm", "missing_key", "rpm", {"at": AT}, 0)
    scase("speed", "turning_backwards", "out_of_range", "rpm", {"rpm": -1482.5})
    scase("speed", "a_million_and_one", "out_of_range", "rpm", {"rpm": 1000001})
    scase("speed", "rpm_as_text", "wrong_type", "rpm", {"rpm": "1482"})
    scase("speed", "at_in_words", "bad_time", "at", {"at": "now", "rpm": 1})
    scase("process", "name_with_a_space", "bad_id", "name", {"name": "flow rate", "value": 1})
    scase("process", "name_of_65", "bad_id", "name", {"name": "n" * 65, "value": 1})
    scase("process", "unit_of_nothing", "bad_text", "unit", {"name": "flow", "value": 1, "unit": ""})
    scase("process", "unit_with_a_control_character", "bad_text", "unit", {"name": "flow", "value": 1, "unit": "m3\x7f"})
    scase("process", "no_value", "missing_key", "value", {"name": "flow"}, 0)
    scase("process", "value_as_text", "wrong_type", "value", {"name": "flow", "value": "62"})
    scase("command", "dancing", "unknown_verb", "do", {"id": "c-1", "do": "dance"})
    scase("command", "a_verb_in_capitals", "unknown_verb", "do", {"id": "c-1", "do": "Reset"})
    scase("command", "id_of_dots", "bad_id", "id", {"id": "..", "do": "status"})
    scase("command", "by_of_201", "bad_text", "by",
          {"id": "c-1", "do": "reset", "occurrence": "0-1", "by": "x" * 201})
    scase("command", "nobody_acknowledges", "missing_key", "by", {"id": "c-1", "do": "acknowledge", "occurrence": "0-1"}, 0)
    scase("command", "acknowledging_nothing", "missing_key", "occurrence", {"id": "c-1", "do": "acknowledge", "by": "x"}, 0)
    scase("command", "resend_from_minus_one", "out_of_range", "from_n", {"id": "c-1", "do": "resend", "from_n": -1})
    scase("command", "expired_before_2000", "time_out_of_range", "expires",
          {"id": "c-1", "do": "status", "expires": "1999-01-01T00:00:00Z"})
case("speed-json", "bare_and_backwards", "out_of_range", "rpm", "-3", 0)
case("speed-json", "bare_beyond_any_number", "out_of_range", "rpm", " 1e999", 1)
case("speed-json", "bare_with_a_unit", "trailing_bytes", None, "1482 rpm", 5)
case("speed-json", "bare_and_cut", "truncated", None, "1482.", 5)
case("speed-json", "bare_with_a_leading_zero", "bad_syntax", None, "01", 1)

# manifest.txt is kept by hand: it says with which settings each file is read.
for name, lines in sorted(FILES.items()):
    (HERE / f"{name}.txt").write_text("\n".join(lines.values()) + "\n")

"""The same job with Debian's python3-intelhex and Python's zipfile (stored): reads the devices as JSON from standard
input, writes the bundle to the path given, and prints the seconds of both parts and the digests of all images."""
import binascii, hashlib, io, json, os, struct, sys, time, zipfile
from intelhex import IntelHex

SPEC = json.load(sys.stdin)
FIELDS, DEVICES = SPEC["fields"], SPEC["devices"]
CODES = {"u8": "<B", "u16": "<H", "i16": "<h", "u32": "<I", "i32": "<i", "f32": "<f", "f64": "<d"}
for field in FIELDS:
    field["pack"] = struct.Struct(CODES[field["type"]]) if field["type"] in CODES else None
SHARED = SPEC["shared"]


def encode(device):
    image = bytearray(b"\xff" * 256)
    decoded = []
    for field in FIELDS:
        kind, at, scale = field["type"], field["at"], field.get("scale")
        value = field["value"]
        if "const" in value:
            value = value["const"]
        elif value["from"].startswith("coefficients."):
            value = device["coefficients"][value["from"][13:]]
        else:
            value = device["serial"] if value["from"] == "device.serial" else SHARED[value["from"]]
        if "min" in field and not field["min"] <= value <= field["max"]:
            raise ValueError(field["name"])
        if kind == "ascii":
            raw = value.encode("ascii").ljust(field["length"], b"\0")
        elif kind == "bytes":
            raw = bytes.fromhex(value)
        elif kind == "i24":
            stored = round(value / scale)
            raw, value = stored.to_bytes(3, "little", signed=True), stored * scale
        elif kind in ("f32", "f64"):
            raw = field["pack"].pack(value)
            value = field["pack"].unpack(raw)[0]
        else:
            stored = round(value / scale) if scale else value
            raw, value = field["pack"].pack(stored), stored * scale if scale else stored
        image[at:at + len(raw)] = raw
        decoded.append({"at": at, "name": field["name"], "raw": raw.hex(), "unit": field.get("unit"), "value": value})
    crc = binascii.crc_hqx(bytes(image[:254]), 0xFFFF)
    image[254:256] = crc.to_bytes(2, "little")
    decoded.append({"at": 254, "name": "imageCrc", "raw": bytes(image[254:256]).hex(), "unit": None, "value": crc})
    return bytes(image), decoded


started = time.perf_counter()
lines, hexes, entries = [], [], []
for device in DEVICES:
    image, decoded = encode(device)
    reader = IntelHex()
    reader.frombytes(image)
    text = io.StringIO()
    reader.write_hex_file(text)
    text = text.getvalue().encode("ascii")
    digest = hashlib.sha256(image).hexdigest()
    line = {"derivation": SPEC["derivation"], "fields": decoded, "serial": device["serial"], "sha256": digest}
    lines.append(json.dumps(line, sort_keys=True, separators=(",", ":"), ensure_ascii=False))
    path = f"images/{device['serial']}.hex"
    hexes.append((path, text))
    entries.append({"bytes": 256, "hardwareId": None, "hex": {"path": path, "sha256": hashlib.sha256(text).hexdigest()},
                    "serial": device["serial"], "sha256": digest})
core = time.perf_counter() - started

values = ("\n".join(lines) + "\n").encode()
manifest = {**SPEC["head"], "format": "trimwright/package@1", "images": entries,
            "values": {"path": "images.jsonl", "sha256": hashlib.sha256(values).hexdigest()}}
manifest = json.dumps(manifest, sort_keys=True, separators=(",", ":")).encode()
sums = [("images.jsonl", values), *hexes, ("manifest.json", manifest)]
sums = "".join(f"{hashlib.sha256(content).hexdigest()}  {path}\n" for path, content in sums).encode()
files = [("SHA256SUMS", sums), ("VERIFY.txt", b"see there\n"), ("images.jsonl", values), *hexes, ("manifest.json", manifest)]
with open(sys.argv[1], "wb") as target:
    with zipfile.ZipFile(target, "w", zipfile.ZIP_STORED) as bundle:
        for path, content in files:
            bundle.writestr(zipfile.ZipInfo(path, (1980, 1, 1, 0, 0, 0)), content)
    target.flush()
    os.fsync(target.fileno())
whole = time.perf_counter() - started
print(json.dumps({"core": core, "whole": whole, "images": hashlib.sha256("".join(e["sha256"] for e in entries).encode()).hexdigest()}))

"""A layer includes only the headers of the layers that src/CMakeLists.txt names after DEPENDS."""
import re

from tree import ROOT, files, finish, relative

INCLUDE = re.compile(r'^\s*#\s*include\s*["<]([^">]+)[">]')
# Libraries that one layer alone may know, so that they can be exchanged in one place.
KEPT_TO = {"netcdf": {"io"}, "ncFile.h": {"io"}, "ncVar.h": {"io"}, "hdf5": {"io"}, "udunits2.h": {"io"},
           "toml++/": {"job"}, "CLI/": {"cli"}, "omp.h": {"pipeline"}}


def declared():
    """layer -> the layers it may include, itself among them; as the build reads them."""
    text = (ROOT / "src/CMakeLists.txt").read_text()
    layers = {}
    for name, rest in re.findall(r"^lagscape_layer\((\w+)([^)]*)\)", text, re.M):
        depends = re.search(r"DEPENDS\s+([\w\s]*?)(?:LIBRARIES|$)", rest)
        layers[name] = {name} | set(depends.group(1).split() if depends else [])
    return layers


def layer_of(name):
    """The layer that a file of ours, or a header as it is included, belongs to; None for others."""
    match = re.match(r"(?:include/lagscape|src|lagscape)/(\w+)/", name)
    return match.group(1) if match else None


layers = declared()
problems, checked = [], 0
for name, allowed in layers.items():
    for other in allowed - {name}:
        if other not in layers or list(layers).index(other) > list(layers).index(name):
            problems.append(f"src/CMakeLists.txt: layer {name} depends on {other}, which is not declared before it")

for path in files():
    here = relative(path)
    if not re.match(r"(src|include)/", here) or path.suffix not in {".h", ".cpp"}:
        continue
    own = layer_of(here)
    if own is None and here != "src/main.cpp":
        problems.append(f"{here}: in no layer")
        continue
    if own and own not in layers:
        problems.append(f"{here}: layer {own} is not declared in src/CMakeLists.txt")
        continue
    allowed = layers[own] if own else {"cli"}
    for number, line in enumerate(path.read_text().splitlines(), 1):
        found = INCLUDE.match(line)
        if not found:
            continue
        header = found.group(1)
        checked += 1
        private = header.split("/")[0]
        if header.startswith("lagscape/"):
            target = layer_of(header)
            if target and target not in allowed:
                problems.append(f"{here}:{number}: {own} must not include {header}")
            if not (ROOT / "include" / header).exists() and header != "lagscape/version.h":
                problems.append(f"{here}:{number}: there is no {header}")
        elif private in layers and (ROOT / "src" / header).exists() and private != own:
            problems.append(f"{here}:{number}: {header} is private to {private}")
        for library, users in KEPT_TO.items():
            if header.startswith(library) and own not in users:
                problems.append(f"{here}:{number}: {header} is kept to {', '.join(sorted(users))}")
finish(problems, checked)

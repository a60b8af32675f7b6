"""The C99 export: one header that needs no other file, allocates nothing and calls nothing.

Everything stands in ``static`` form, so that any number of translation units and prefixes meet in one program; it is
valid C++ too. The arithmetic is written operation by operation in the order of the structure: with contraction off
(``-ffp-contract=off``) its results are the same bits everywhere.
"""

from tonebench.builds.build import Build
from tonebench.builds.c99_comment import header_comment
from tonebench.builds.c99_numbers import literal, table_rows, type_name
from tonebench.target.arithmetic import Structure

_STATE_WORDS = {Structure.TDF2: 2, Structure.DF2: 2, Structure.DF1: 4}
_SUFFIX_SIZE = "u"

# One frame of one section: x in, y out; c the coefficients b0 b1 b2 a1 a2, s the section's state.
_STEPS = {
    Structure.TDF2: (
        "const {t} y = c[0] * x + s[0];",
        "s[0] = c[1] * x - c[3] * y + s[1];",
        "s[1] = c[2] * x - c[4] * y;",
    ),
    Structure.DF2: (
        "const {t} w = x - c[3] * s[0] - c[4] * s[1];",
        "const {t} y = c[0] * w + c[1] * s[0] + c[2] * s[1];",
        "s[1] = s[0];",
        "s[0] = w;",
    ),
    Structure.DF1: (
        "const {t} y = c[0] * x + c[1] * s[0] + c[2] * s[1] - c[3] * s[2] - c[4] * s[3];",
        "s[1] = s[0];",
        "s[0] = x;",
        "s[3] = s[2];",
        "s[2] = y;",
    ),
}


def c99_text(build: Build) -> str:
    """Return the header's text, with line feeds, in plain ASCII."""
    guard = f"{build.prefix}_H_INCLUDED"
    blocks = [
        header_comment(build),
        [f"#ifndef {guard}", f"#define {guard}", "", "#include <stddef.h>"],
        _tables(build),
        _state(build),
        _reset(build),
        _process(build),
        [f"#endif /* {guard} */"],
    ]
    return "\n\n".join("\n".join(lines) for lines in blocks if lines) + "\n"


def _delays(build: Build) -> list[int]:
    return [one.delay_samples for one in build.rounded.sections]


def _tables(build: Build) -> list[str]:
    count = len(build.sections)
    if count == 0:
        return []
    name, kind = build.prefix, type_name(build.target)
    lines = [
        "/* b0, b1, b2, a1, a2 of each section. */",
        f"static const {kind} {name}_coefficients[{count}][5] = {{",
        *table_rows(build),
        "};",
    ]
    delays = _delays(build)
    if any(delays):
        starts = [sum(delays[:index]) for index in range(count)]
        for what, values in (("delays", delays), ("delay_starts", starts)):
            shown = ", ".join(f"{value}{_SUFFIX_SIZE}" for value in values)
            lines.append(f"static const size_t {name}_{what}[{count}] = {{{shown}}};")
    return lines


def _state(build: Build) -> list[str]:
    name, kind, count = build.prefix, type_name(build.target), len(build.sections)
    delays = _delays(build)
    lines = [
        "/* One per channel; reset it before its first use. */",
        f"typedef struct {name}_state {{",
    ]
    if count == 0:
        lines.append("    char unused; /* a chain without sections keeps no state */")
    else:
        lines.append(f"    {kind} sections[{count}][{_STATE_WORDS[build.target.structure]}];")
    if any(delays):
        lines += [f"    {kind} delay_line[{sum(delays)}];", f"    size_t delay_at[{count}];"]
    return [*lines, f"}} {name}_state;"]


def _reset(build: Build) -> list[str]:
    name, count = build.prefix, len(build.sections)
    lines = [
        "/* Puts one channel to rest. */",
        f"static inline void {name}_reset({name}_state *state)",
        "{",
    ]
    if count == 0:
        return [*lines, "    state->unused = 0;", "}"]
    zero = literal(0.0, build.target)
    words = _STATE_WORDS[build.target.structure]
    lines += [
        "    size_t k;",
        "    size_t i;",
        f"    for (k = 0; k < {count}u; ++k) {{",
        f"        for (i = 0; i < {words}u; ++i) {{",
        f"            state->sections[k][i] = {zero};",
        "        }",
    ]
    total = sum(_delays(build))
    if total:
        lines += ["        state->delay_at[k] = 0;", "    }", f"    for (i = 0; i < {total}u; ++i) {{"]
        lines.append(f"        state->delay_line[i] = {zero};")
    return [*lines, "    }", "}"]


def _process(build: Build) -> list[str]:
    name, kind = build.prefix, type_name(build.target)
    head = [
        "/* Filters one channel; in and out may be the same memory. */",
        f"static inline void {name}_process({name}_state *state, const {kind} *in, {kind} *out, size_t frames)",
        "{",
        "    size_t frame;",
    ]
    if not build.sections:
        head.append("    (void)state;")
        if build.chain.combine == "sum" and build.rounded.direct_gain == 0.0:
            head.append("    (void)in;")
    return [*head, "    for (frame = 0; frame < frames; ++frame) {", *_frame(build), "    }", "}"]


def _frame(build: Build) -> list[str]:
    kind = type_name(build.target)
    if build.chain.combine == "sum":
        direct = literal(build.rounded.direct_gain, build.target)
        start = [f"const {kind} heard = in[frame];", f"{kind} total = {direct} * heard;"]
        if build.rounded.direct_gain == 0.0:
            zero = literal(0.0, build.target)
            start = [f"{kind} total = {zero};"]
            if build.sections:
                start.insert(0, f"const {kind} heard = in[frame];")
        body, result = [f"const {kind} x = heard;"], ("total = total + {y};", "total")
    else:
        start = [f"{kind} {'x' if build.sections else 'total'} = in[frame];"]
        body, result = [], ("x = {y};", "x" if build.sections else "total")
    lines = [*start, *(_section_loop(build, body, result[0]) if build.sections else [])]
    gain = build.rounded.gain
    scaled = result[1] if gain == 1.0 else f"{literal(gain, build.target)} * {result[1]}"
    return [f"        {line}" for line in [*lines, f"out[frame] = {scaled};"]]


def _section_loop(build: Build, body: list[str], finish: str) -> list[str]:
    name, kind = build.prefix, type_name(build.target)
    steps = [
        f"const {kind} *c = {name}_coefficients[k];",
        f"{kind} *s = state->sections[k];",
        *body,
        *(step.format(t=kind) for step in _STEPS[build.target.structure]),
    ]
    if any(_delays(build)):
        steps += [
            f"{kind} late = y;",
            f"if ({name}_delays[k] != 0) {{",
            f"    {kind} *line = state->delay_line + {name}_delay_starts[k];",
            "    const size_t at = state->delay_at[k];",
            "    late = line[at];",
            "    line[at] = y;",
            f"    state->delay_at[k] = (at + 1u == {name}_delays[k]) ? 0u : at + 1u;",
            "}",
            finish.format(y="late"),
        ]
    else:
        steps.append(finish.format(y="y"))
    count = len(build.sections)
    return ["size_t k;", f"for (k = 0; k < {count}u; ++k) {{", *(f"    {step}" for step in steps), "}"]

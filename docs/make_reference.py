#!/usr/bin/env python3
"""Writes docs/reference.md from the two public headers, the Python package, the Lua annotations and reference_notes.toml.

    make_reference.py [--check]

What a header says is taken from the header; signatures are taken from the sources of the bindings. The notes add, per C
function: its names in Python and Lua, unit and range of each argument, result, errors, validity, source. Complaints end
it with 1: a function without notes, notes without a function, an argument without a unit and range, a name that a
binding does not have. --check writes nothing and fails where the committed file is stale.
"""
import ast
import re
import sys
import tomllib
from dataclasses import dataclass, field
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
HEADERS = ["libstub.h", "libstub_ipc2581.h"]
OUT = ROOT / "docs" / "reference.md"
SECTION = re.compile(r"^/\* ---- (.+?) -+\s*\*?/?$")
NOT_CODE = ("#ifndef LIBSTUB", "#define LIBSTUB", "#include", "#ifdef __cplusplus", "#if defined", "#elif defined",
            "#else", "#endif", "#define LSTUB_API", 'extern "C"', "}")


# ---- headers --------------------------------------------------------------------------------------------------------

@dataclass
class Function:
    name: str
    prototype: str
    says: str
    arguments: list = field(default_factory=list)      # names


@dataclass
class Code:
    text: str                                          # constants, structs, macros as they stand


@dataclass
class Section:
    title: str
    intro: str
    parts: list = field(default_factory=list)


def comment_text(lines):
    """The words of a comment, without its marks; line breaks kept."""
    text = "\n".join(lines).strip()
    text = re.sub(r"^/\*+ ?|\s*\*/$", "", text)
    return "\n".join(re.sub(r"^\s*\*\* ?", "", line).rstrip() for line in text.split("\n")).strip()


def argument_names(prototype):
    inside = prototype[prototype.index("(") + 1:prototype.rindex(")")].strip()
    return [] if inside == "void" else [re.search(r"(\w+)\s*$", part)[1] for part in inside.split(",")]


def read_block(lines, i):
    """A comment that begins in line i: its lines and the line after it."""
    start = i
    while "*/" not in lines[i]:
        i += 1
    return lines[start:i + 1], i + 1


def read_function(lines, i, above):
    """A prototype that begins in line i, and the line after it. What follows it on its line belongs to it."""
    text = ""
    while True:
        text += lines[i].strip() + " "
        i += 1
        if ";" in text:
            break
    code, _, rest = text.partition(";")
    if "/*" in rest and "*/" not in rest:
        more, i = read_block(lines, i)
        rest += " ".join(line.strip() for line in more)
    beside = " ".join(comment_text([rest.strip()]).split())
    prototype = " ".join(code.replace("LSTUB_API ", "").split()) + ";"
    name = re.search(r"(lstub_\w+)\s*\(", prototype)[1]
    return Function(name, prototype, "\n\n".join(filter(None, [above, beside])), argument_names(prototype)), i


def read_header(path):
    """Sections of a header in its order."""
    lines = path.read_text(encoding="utf-8").splitlines()
    begin = next(i for i, line in enumerate(lines) if SECTION.match(line))
    sections, i, above, fresh = [], begin, "", False
    while i < len(lines):
        line = lines[i]
        if not line.strip() or line.startswith(NOT_CODE):
            above = "" if not line.strip() else above
            i += 1
        elif SECTION.match(line):
            block, i = read_block(lines, i)
            sections.append(Section(SECTION.match(line)[1].strip(), comment_text(block[1:]) if len(block) > 1 else ""))
            above = ""
        elif line.startswith("/*"):
            block, i = read_block(lines, i)
            above, fresh = comment_text(block), True
        elif line.startswith("LSTUB_API"):
            function, after = read_function(lines, i, above)
            if not fresh and function.says != above:        # its own words are beside it: those above are another's
                function, after = read_function(lines, i, "")
            fresh = False
            sections[-1].parts.append(function)
            i = after
        else:
            start, i = i, read_code(lines, i, sections[-1].parts, above if fresh else "")
            if lines[start].startswith("#define") and lines[i].startswith("LSTUB_API") and fresh:
                sections[-1].parts[-1] = Code("\n".join(lines[start:i]))    # the comment is that of the function
            else:
                above = ""
    return sections


def read_code(lines, i, parts, above):
    """Constants and types up to an empty line, a comment or a function; one block where they stand together."""
    start = i
    if lines[i].startswith("typedef struct") and "{" in lines[i]:
        while not lines[i].startswith("}"):
            i += 1
        i += 1
    else:
        while i < len(lines) and lines[i].strip() and not lines[i].startswith(("LSTUB_API", "/*", "typedef struct")):
            i += 1
        i += i == start
        while "/*" in lines[i - 1] and "*/" not in lines[i - 1]:
            i += 1
    text = "\n".join(lines[start:i])
    if above:
        text = "/* " + above.replace("\n", "\n** ") + " */\n" + text
    parts.append(Code(text))
    return i


# ---- bindings -------------------------------------------------------------------------------------------------------

def python_signatures():
    """'Model.zin' -> 'Model.zin(f, *, stub=ALL_STUBS, out=None)' of everything public."""
    found, bases = {}, {}

    def arguments(node):
        args = node.args
        every = [*args.posonlyargs, *args.args, *args.kwonlyargs, args.vararg, args.kwarg]
        for one in filter(None, every):
            one.annotation = None
        if args.args and args.args[0].arg in ("self", "cls"):
            args.args.pop(0)
        return ast.unparse(args)

    def is_property(node):
        return any(isinstance(d, ast.Name) and d.id == "property" for d in node.decorator_list)

    def walk_class(node):
        made = [n for n in node.body if isinstance(n, ast.FunctionDef) and n.name == "__init__"]
        fields = ["*" if n.target.id == "_" else f"{n.target.id}={ast.unparse(n.value)}" if n.value else n.target.id
                  for n in node.body if isinstance(n, ast.AnnAssign) and isinstance(n.target, ast.Name)
                  and (n.target.id == "_" or n.target.id[0] != "_")]
        if "kw_only=True" in " ".join(ast.unparse(d) for d in node.decorator_list):
            fields.insert(0, "*")
        inside = arguments(made[0]) if made else ", ".join(fields)
        found[node.name] = f"{node.name}({inside})" if inside and inside != "*args, **kwargs" else node.name
        bases[node.name] = [base.id for base in node.bases if isinstance(base, ast.Name)]
        for n in node.body:
            if isinstance(n, ast.FunctionDef) and n.name[0] != "_":
                full = f"{node.name}.{n.name}"
                found[full] = full if is_property(n) else f"{full}({arguments(n)})"
            elif isinstance(n, ast.AnnAssign) and isinstance(n.target, ast.Name):
                found[f"{node.name}.{n.target.id}"] = f"{node.name}.{n.target.id}"

    for path in sorted((ROOT / "bindings/python/libstub").glob("*.py")):
        for node in ast.parse(path.read_text(encoding="utf-8")).body:
            if isinstance(node, ast.ClassDef):
                walk_class(node)
            elif isinstance(node, ast.FunctionDef):
                found[node.name] = f"{node.name}({arguments(node)})"
            elif isinstance(node, (ast.Assign, ast.AnnAssign)):
                for target in getattr(node, "targets", [getattr(node, "target", None)]):
                    if isinstance(target, ast.Name):
                        found[target.id] = target.id
    for name, above in bases.items():                      # what a class has from another one
        for base in above:
            for full in [full for full in found if full.startswith(f"{base}.")]:
                found.setdefault(full.replace(base, name, 1), found[full].replace(base, name, 1))
    return found


def lua_signatures():
    """'model:zin' -> 'model:zin(freq, options)' and the names of the tables, from the annotations."""
    found = {}
    for path in sorted((ROOT / "bindings/lua").glob("*.d.lua")):
        text = path.read_text(encoding="utf-8")
        for name, arguments in re.findall(r"^function ([\w.:]+)\(([^)]*)\) end", text, flags=re.M):
            found[name] = f"{name}({arguments})"
        for name in re.findall(r"^---@class (?:libstub\.)?(\w+)", text, flags=re.M):
            found[f"table {name}"] = name
    return found


# ---- text -----------------------------------------------------------------------------------------------------------

def plain(text):
    """Words of a header as Markdown text: nothing of them may turn into a mark."""
    parts = text.split("`")                            # every second one is code
    return "`".join(part if i % 2 else re.sub(r"([\\*<\[\]])", r"\\\1", part) for i, part in enumerate(parts))


def paragraphs(text):
    """Header words as paragraphs; lines that begin with In, Out, Ret, Source become items."""
    result = []
    for block in re.split(r"\n\s*\n", text):
        lines = block.split("\n")
        if all(line.startswith("    ") for line in lines):
            result.append("```text\n" + "\n".join(lines) + "\n```")
            continue
        items = re.split(r"(?:^|\n)(?=(?:In|Out|Ret|Source|Needs) {1,3}\S)", "\n".join(lines))
        for item in filter(str.strip, items):
            words = plain(" ".join(item.split()))
            result.append(f"- {words}" if re.match(r"(In|Out|Ret|Source) ", words) and len(items) > 1 else words)
    return re.sub(r"\n\n(?=- )", "\n", "\n\n".join(result)).replace("\n- ", "\n\n- ", 1) if result else ""


def names_line(notes, python, lua, wrong, what):
    line = []
    for language, known in (("Python", python), ("Lua", lua)):
        given = notes.get(language.lower(), [])
        given = [given] if isinstance(given, str) else given
        shown = []
        for name in given:
            if name.startswith("("):                       # words, not a name
                shown.append(name)
            elif name in known:
                shown.append(("table " if name.startswith("table ") else "") + f"`{known[name]}`")
            else:
                wrong.append(f"{what}: {language} has no {name}")
        line.append(f"{language}: {', '.join(shown) if shown else 'none'}")
    return "  \n".join(line)


def cell(text):
    return text.replace("|", "\\|")


def function_text(function, notes, common, python, lua, wrong):
    own = notes["function"].get(function.name)
    if own is None:
        wrong.append(f"{function.name}: not in reference_notes.toml")
        return ""
    text = [f"### {function.name}", "```text\n" + wrap(function.prototype) + "\n```", paragraphs(own.get("says", function.says))]
    if own.get("note"):
        text.append(own["note"])
    text.append(names_line(own, python, lua, wrong, function.name))
    given, rows = own.get("arguments", {}), []
    for name in function.arguments:
        words = given.get(name, common.get(name))
        if words is None:
            wrong.append(f"{function.name}: argument {name} has no unit and range")
        elif words:
            unit, limits, meaning = (part.strip() for part in words.split("|"))
            rows.append(f"| `{name}` | {cell(unit) or '-'} | {cell(limits)} | {cell(meaning)} |")
    wrong += [f"{function.name}: no argument {name}" for name in given if name not in function.arguments]
    if rows:
        text.append("\n".join(["| argument | unit | range | meaning |", "|---|---|---|---|", *rows]))
    items = [f"- Result: {own['result']}"]
    if own.get("errors"):
        items.append("- Status: " + ", ".join(f"`LSTUB_{word}`" for word in own["errors"].split()))
    items += [f"- {word}: {own[key]}" for key, word in (("valid", "Validity"), ("source", "Source")) if own.get(key)]
    text.append("\n".join(items))
    return "\n\n".join(filter(None, text))


def wrap(prototype, width=100):
    """A long prototype broken after commas."""
    if len(prototype) <= width:
        return prototype
    indent, lines, line = " " * (prototype.index("(") + 1), [], ""
    for i, part in enumerate(prototype.split(", ")):
        part = part if i == 0 else part
        candidate = part if not line else f"{line}, {part}"
        if len(candidate) > width and line:
            lines.append(line + ",")
            line = indent + part
        else:
            line = candidate
    return "\n".join([*lines, line])


def code_text(part, notes, python, lua, wrong):
    text = "```text\n" + part.text + "\n```"
    struct = re.search(r"^typedef struct (lstub_\w+) \{", part.text, flags=re.M)
    if struct:
        own = notes["struct"].get(struct[1])
        if own is None:
            wrong.append(f"struct {struct[1]}: not in reference_notes.toml")
        else:
            text = f"#### struct {struct[1]}\n\n{names_line(own, python, lua, wrong, struct[1])}\n\n{text}"
    return text


def make(wrong):
    notes = tomllib.loads((ROOT / "docs/reference_notes.toml").read_text(encoding="utf-8"))
    python, lua = python_signatures(), lua_signatures()
    text, functions, structs = [notes["head"].strip()], set(), set()
    toc = []
    for header in HEADERS:
        sections = read_header(ROOT / "libstub/include" / header)
        toc.append(f"- `{header}`")
        text.append(f"# {header}")
        for section in sections:
            title = section.title[0].upper() + section.title[1:]
            toc.append(f"  - [{title}](#{re.sub(r'[^a-z0-9 _-]', '', title.lower()).replace(' ', '-')})")
            text.append(f"## {title}")
            if section.intro:
                text.append(paragraphs(section.intro))
            for part in section.parts:
                if isinstance(part, Code):
                    text.append(code_text(part, notes, python, lua, wrong))
                    structs |= set(re.findall(r"^typedef struct (lstub_\w+) \{", part.text, flags=re.M))
                else:
                    functions.add(part.name)
                    text.append(function_text(part, notes, notes["common"], python, lua, wrong))
    wrong += [f"reference_notes.toml: no function {name}" for name in notes["function"] if name not in functions]
    wrong += [f"reference_notes.toml: no struct {name}" for name in notes["struct"] if name not in structs]
    listed = {n for f in ("libstub", "libstub_ipc2581") for n in (ROOT / f"libstub/abi/{f}.syms").read_text().split()}
    wrong += [f"exported, but not found in the headers: {name}" for name in sorted(listed - functions)]
    text.insert(1, "\n".join(toc))
    return "\n\n".join(text) + "\n"


def main(arguments):
    wrong = []
    text = make(wrong)
    if wrong:
        print("\n".join(wrong))
        return 1
    if "--check" in arguments:
        if not OUT.exists() or OUT.read_text(encoding="utf-8") != text:
            print("docs/reference.md is stale: run docs/make_reference.py and commit what it writes")
            return 1
        print("docs/reference.md is up to date")
        return 0
    OUT.write_text(text, encoding="utf-8")
    print(f"wrote docs/reference.md, {text.count(chr(10))} lines")
    return 0


if __name__ == "__main__":
    sys.exit(main(sys.argv[1:]))

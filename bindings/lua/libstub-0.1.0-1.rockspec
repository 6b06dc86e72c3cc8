-- The Lua module with the whole library in it, from source. In the project's folder:
--
--     luarocks make bindings/lua/libstub-0.1.0-1.rockspec
--
-- needs a C compiler and the headers of Lua 5.4, expat and zlib (Debian: liblua5.4-dev libexpat1-dev zlib1g-dev).
rockspec_format = "3.0"
package = "libstub"
version = "0.1.0-1"
source = {
  url = "file://libstub-0.1.0.tar.gz",   -- an archive of this project beside the rockspec; `make` needs none
  dir = "libstub-0.1.0",
}
description = {
  license = "MIT",
  summary = "Via-stub analysis and back-drill planning for multilayer boards",
  detailed = [[
    How long the stubs of a via are, where they notch the channel, what they cost at a symbol rate, whether to drill
    them back, from which side and how deep: for one via or for a whole board read from IPC-2581.]],
}
dependencies = { "lua ~> 5.4" }
external_dependencies = {
  EXPAT = { header = "expat.h" },
  ZLIB = { header = "zlib.h" },
}
build = {
  type = "builtin",
  modules = {
    libstub = {
      sources = {
        "libstub/base/base.c",
        "libstub/num/bessel.c",
        "libstub/num/dense.c",
        "libstub/num/elliptic.c",
        "libstub/num/formulas.c",
        "libstub/num/polylog.c",
        "libstub/num/root.c",
        "libstub/material/material.c",
        "libstub/stackup/stackup.c",
        "libstub/via/via.c",
        "libstub/model/barrel.c",
        "libstub/model/branch.c",
        "libstub/model/cavity_compile.c",
        "libstub/model/cavity_eval.c",
        "libstub/model/cavity_half.c",
        "libstub/model/cavity_mesh.c",
        "libstub/model/cavity_modes.c",
        "libstub/model/cavity_ring.c",
        "libstub/model/ladder.c",
        "libstub/model/line.c",
        "libstub/model/model.c",
        "libstub/model/notch.c",
        "libstub/model/notch_search.c",
        "libstub/model/site.c",
        "libstub/criteria/judge.c",
        "libstub/criteria/limit.c",
        "libstub/plan/alike.c",
        "libstub/plan/decide.c",
        "libstub/plan/plan.c",
        "libstub/plan/room.c",
        "libstub/plan/stab.c",
        "libstub/plan/words.c",
        "libstub/ipc2581/arena.c",
        "libstub/ipc2581/board.c",
        "libstub/ipc2581/features.c",
        "libstub/ipc2581/geometry.c",
        "libstub/ipc2581/grid.c",
        "libstub/ipc2581/mark.c",
        "libstub/ipc2581/notice.c",
        "libstub/ipc2581/number.c",
        "libstub/ipc2581/outfile.c",
        "libstub/ipc2581/plan_board.c",
        "libstub/ipc2581/reader_dict.c",
        "libstub/ipc2581/reader_drill.c",
        "libstub/ipc2581/reader_holes.c",
        "libstub/ipc2581/reader_layers.c",
        "libstub/ipc2581/reader_near.c",
        "libstub/ipc2581/reader_scan.c",
        "libstub/ipc2581/reader_sites.c",
        "libstub/ipc2581/reader_spec.c",
        "libstub/ipc2581/reader_stackup.c",
        "libstub/ipc2581/reader_via.c",
        "libstub/ipc2581/report.c",
        "libstub/ipc2581/rules.c",
        "libstub/ipc2581/rules_parse.c",
        "libstub/ipc2581/shape.c",
        "libstub/ipc2581/summary.c",
        "libstub/ipc2581/text.c",
        "libstub/ipc2581/touch.c",
        "libstub/ipc2581/writer.c",
        "libstub/ipc2581/xml.c",
        "bindings/lua/src/array.c",
        "bindings/lua/src/board.c",
        "bindings/lua/src/capability.c",
        "bindings/lua/src/criteria.c",
        "bindings/lua/src/formula.c",
        "bindings/lua/src/handle.c",
        "bindings/lua/src/model.c",
        "bindings/lua/src/module.c",
        "bindings/lua/src/option.c",
        "bindings/lua/src/plan.c",
        "bindings/lua/src/report.c",
        "bindings/lua/src/rules.c",
        "bindings/lua/src/stackup.c",
        "bindings/lua/src/via.c",
      },
      incdirs = { "libstub/include", "libstub", "$(EXPAT_INCDIR)", "$(ZLIB_INCDIR)" },
      libdirs = { "$(EXPAT_LIBDIR)", "$(ZLIB_LIBDIR)" },
      libraries = { "expat", "z", "m" },
    },
  },
}

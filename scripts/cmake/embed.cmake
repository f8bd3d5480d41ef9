# Files that travel inside the program, so that it needs nothing beside itself at run time.
#
#   stillmass_embed(TARGET namespace::function file...)
#
# adds to TARGET a source that defines `std::string_view namespace::function(std::string_view file_name)`, which gives
# the file's bytes or, for an unknown name, an empty view. The assembler takes the bytes in as they are.

function(stillmass_embed target function)
  string(REGEX REPLACE "^(.*)::([^:]+)$" "\\1" space "${function}")
  string(REGEX REPLACE "^(.*)::([^:]+)$" "\\2" name "${function}")
  set(blobs "")
  set(declarations "")
  set(rows "")
  set(number 0)
  foreach(file IN LISTS ARGN)
    get_filename_component(file_name "${file}" NAME)
    set(symbol "stillmass_${name}_${number}")
    string(APPEND blobs
      "asm(\".section .rodata\\n.balign 16\\n${symbol}_begin:\\n.incbin \\\"${file}\\\"\\n${symbol}_end:\\n.byte 0\\n\"\n"
      "    \".global ${symbol}_begin\\n.global ${symbol}_end\\n.previous\\n\");\n")
    string(APPEND declarations "extern \"C\" const char ${symbol}_begin[];\nextern \"C\" const char ${symbol}_end[];\n")
    string(APPEND rows "  if (file == \"${file_name}\") return {${symbol}_begin, static_cast<std::size_t>(${symbol}_end - ${symbol}_begin)};\n")
    math(EXPR number "${number} + 1")
  endforeach()
  set(source "${CMAKE_BINARY_DIR}/embedded/${name}.cpp")
  file(CONFIGURE OUTPUT "${source}" @ONLY CONTENT
"#include <string_view>
@blobs@
@declarations@
namespace @space@ {
std::string_view @name@(std::string_view file);
std::string_view @name@([[maybe_unused]] std::string_view file) {
@rows@  return {};
}
}  // namespace @space@
")
  set_source_files_properties("${source}" PROPERTIES OBJECT_DEPENDS "${ARGN}" SKIP_LINTING ON)
  target_sources(${target} PRIVATE "${source}")
endfunction()

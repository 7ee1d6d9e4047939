# Turns the man pages into the source of help_text(): cmake -DPAGES=... -DMANDOC=... -DOUT=... -P help_text.cmake
set(source "// Made from docs/man by src/cli/help_text.cmake.\n#include \"verbs.hpp\"\n\nnamespace trotline {\n\n")
string(APPEND source "const char* help_text(const std::string& verb) {\n")
foreach(page ${PAGES})
  get_filename_component(name ${page} NAME_WE)
  execute_process(COMMAND ${MANDOC} -T ascii -O width=88,indent=4 ${page}
                  OUTPUT_VARIABLE text RESULT_VARIABLE failed)
  if(failed)
    message(FATAL_ERROR "${MANDOC} cannot format ${page}")
  endif()
  string(ASCII 8 backspace)
  string(REGEX REPLACE ".${backspace}" "" text "${text}")  # overstrikes
  string(REGEX REPLACE "^[^\n]*\n\n" "" text "${text}")    # header and footer lines
  string(REGEX REPLACE "\n[^\n]*\n$" "\n" text "${text}")
  string(REGEX REPLACE "^trotline-?" "" verb ${name})
  string(APPEND source "  if (verb == \"${verb}\") return R\"help(${text})help\";\n")
endforeach()
string(APPEND source "  return \"\";\n}\n\n}  // namespace trotline\n")
file(WRITE ${OUT} "${source}")

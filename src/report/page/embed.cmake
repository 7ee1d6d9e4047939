# Turns the files of the page into the source of page_asset(): cmake -DFILES=... -DOUT=... -P embed.cmake
set(source "// Made from src/report/page by embed.cmake.\n#include \"page_assets.hpp\"\n\nnamespace trotline {\n\n")
string(APPEND source "std::string_view page_asset(std::string_view name) {\n")
foreach(file ${FILES})
  get_filename_component(name ${file} NAME)
  file(READ ${file} hex HEX)  # as bytes: the text may hold brackets and semicolons, which lists would eat
  string(REGEX REPLACE "(..)" "0x\\1," bytes "${hex}")
  string(MAKE_C_IDENTIFIER "k_${name}" identifier)
  string(APPEND source "  static constexpr unsigned char ${identifier}[] = {${bytes}};\n")
  string(APPEND source "  if (name == \"${name}\") return {reinterpret_cast<const char*>(${identifier}), sizeof(${identifier})};\n")
endforeach()
string(APPEND source "  return {};\n}\n\n}  // namespace trotline\n")
file(WRITE ${OUT} "${source}")

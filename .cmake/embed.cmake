# embed(target file symbol): puts the bytes of a file into a target as `const unsigned char symbol[]` and `const size_t symbol_bytes`,
# so that the program needs no file at run time. Run with -P this file is the step that writes the C source.
if(CMAKE_SCRIPT_MODE_FILE)
  file(READ "${FROM}" hex HEX)
  string(REGEX REPLACE "(................................)" "\\1\n" hex "${hex}")
  string(REGEX REPLACE "([0-9a-f][0-9a-f])" "0x\\1," bytes "${hex}")
  file(WRITE "${TO}" "/* made from ${NAME} */\n#include <stddef.h>\nextern const unsigned char ${SYMBOL}[];\nextern const size_t ${SYMBOL}_bytes;\n"
                     "const unsigned char ${SYMBOL}[] = {\n${bytes}\n};\nconst size_t ${SYMBOL}_bytes = sizeof ${SYMBOL};\n")
  return()
endif()

set(EMBED_STEP ${CMAKE_CURRENT_LIST_FILE})
function(embed target from symbol)
  set(to ${CMAKE_BINARY_DIR}/embedded/${symbol}.c)
  get_filename_component(name ${from} NAME)
  add_custom_command(OUTPUT ${to} DEPENDS ${from} ${EMBED_STEP} VERBATIM
    COMMAND ${CMAKE_COMMAND} -DFROM=${from} -DTO=${to} -DSYMBOL=${symbol} -DNAME=${name} -P ${EMBED_STEP})
  target_sources(${target} PRIVATE ${to})
endfunction()

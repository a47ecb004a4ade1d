# Compiler flags of every room and test. No -ffast-math and no contraction: results are bit-identical
# at any thread count. -fno-math-errno changes no value.
add_library(sward_flags INTERFACE)
target_compile_features(sward_flags INTERFACE c_std_11)
target_compile_definitions(sward_flags INTERFACE _POSIX_C_SOURCE=200809L _XOPEN_SOURCE=700)
target_compile_options(sward_flags INTERFACE
  -Wall -Wextra -Wpedantic -Wshadow -Wconversion -Wsign-conversion -Wdouble-promotion -Wfloat-equal -Wcast-qual
  -Wwrite-strings -Wstrict-prototypes -Wmissing-prototypes -Wold-style-definition -Wundef -Wvla -Wformat=2
  -Wnull-dereference -fno-common -fno-math-errno -ffp-contract=off)
if(CMAKE_C_COMPILER_ID STREQUAL "GNU")
  target_compile_options(sward_flags INTERFACE -Wlogical-op -Wduplicated-cond -Wduplicated-branches)
endif()
if(SWARD_WERROR)
  target_compile_options(sward_flags INTERFACE -Werror)
endif()
if(SWARD_SANITIZE)
  target_compile_options(sward_flags INTERFACE -fsanitize=${SWARD_SANITIZE} -fno-sanitize-recover=all
                         -fno-omit-frame-pointer -g)
  # Instrumented code defeats the value analysis behind this warning.
  target_compile_options(sward_flags INTERFACE -Wno-null-dereference)
  target_link_options(sward_flags INTERFACE -fsanitize=${SWARD_SANITIZE})
endif()
set(CMAKE_C_STANDARD 11)
set(CMAKE_C_STANDARD_REQUIRED ON)
set(CMAKE_C_EXTENSIONS OFF)
set(CMAKE_C_FLAGS_RELEASE "-O3")
set(CMAKE_EXPORT_COMPILE_COMMANDS ON)

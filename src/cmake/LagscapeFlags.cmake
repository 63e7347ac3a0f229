# Compiler flags of every target of ours, as one interface target that is never exported.
set(CMAKE_CXX_STANDARD 20)
set(CMAKE_CXX_STANDARD_REQUIRED ON)
set(CMAKE_CXX_EXTENSIONS OFF)
if(NOT CMAKE_BUILD_TYPE)
  set(CMAKE_BUILD_TYPE Release)
endif()
if("${CMAKE_CXX_FLAGS}" MATCHES "-ffast-math|-Ofast")
  message(FATAL_ERROR "-ffast-math makes NaN compare equal to itself and would silently break missing values")
endif()

add_library(lagscape_flags INTERFACE)
target_compile_options(lagscape_flags INTERFACE
  -ffp-contract=off -fno-math-errno
  -Wall -Wextra -Wpedantic -Wconversion -Wsign-conversion -Wshadow -Wdouble-promotion -Wundef
  # GCC 12 warns of overlapping copies inside std::string's operator+ where there are none (gcc.gnu.org PR 105651).
  $<$<CXX_COMPILER_ID:GNU>:-Wno-restrict>
  $<$<BOOL:${LAGSCAPE_WERROR}>:-Werror>)
target_include_directories(lagscape_flags INTERFACE ${PROJECT_SOURCE_DIR}/include ${PROJECT_BINARY_DIR}/generated)
if(LAGSCAPE_SANITIZE)
  string(REPLACE "," ";" sanitizers "${LAGSCAPE_SANITIZE}")
  foreach(name IN LISTS sanitizers)
    if(NOT name MATCHES "^(address|undefined|leak)$")
      message(FATAL_ERROR "LAGSCAPE_SANITIZE: '${name}' is not address, undefined or leak")
    endif()
  endforeach()
  target_compile_options(lagscape_flags INTERFACE
    -fsanitize=${LAGSCAPE_SANITIZE} -fno-sanitize-recover=all -fno-omit-frame-pointer
    # Instrumented, the standard library's regular expressions look uninitialised to GCC; the sanitizer itself knows better.
    $<$<CXX_COMPILER_ID:GNU>:-Wno-maybe-uninitialized>)
  target_link_options(lagscape_flags INTERFACE -fsanitize=${LAGSCAPE_SANITIZE})
endif()

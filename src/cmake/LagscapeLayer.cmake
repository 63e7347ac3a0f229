# lagscape_layer(NAME DEPENDS layer... [LIBRARIES target...])
# One static library per layer from src/NAME/*.cpp. DEPENDS is the whole list of layers whose headers it may include;
# tests/lint/layers.py reads the same lines and checks every #include.
function(lagscape_layer name)
  cmake_parse_arguments(arg "" "" "DEPENDS;LIBRARIES" ${ARGN})
  file(GLOB sources CONFIGURE_DEPENDS ${CMAKE_CURRENT_SOURCE_DIR}/${name}/*.cpp)
  add_library(lagscape_${name} STATIC ${sources})
  target_include_directories(lagscape_${name} PRIVATE ${CMAKE_CURRENT_SOURCE_DIR})
  list(TRANSFORM arg_DEPENDS PREPEND lagscape_)
  target_link_libraries(lagscape_${name} PUBLIC ${arg_DEPENDS} fmt::fmt PRIVATE lagscape_flags ${arg_LIBRARIES})
  set_property(GLOBAL APPEND PROPERTY LAGSCAPE_LAYERS ${name})
endfunction()

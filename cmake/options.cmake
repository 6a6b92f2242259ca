# Compiler options that every target of the project is built with.
add_library(holdfast_options INTERFACE)
target_include_directories(holdfast_options INTERFACE ${PROJECT_SOURCE_DIR})
# -ffp-contract=off: fused operations stand in the code where they are meant, so that the kernels' variants give the same bits.
target_compile_options(holdfast_options INTERFACE -Wall -Wextra -Wpedantic -Werror -ffp-contract=off -fno-math-errno)
if(CMAKE_CXX_COMPILER_ID STREQUAL "GNU" AND CMAKE_CXX_COMPILER_VERSION VERSION_LESS 13)
  # GCC 12 warns of overlapping copies inside std::string's operator+ where there are none (its bug 105329).
  target_compile_options(holdfast_options INTERFACE -Wno-restrict)
endif()
if(HOLDFAST_SANITIZE)
  target_compile_options(holdfast_options INTERFACE -fsanitize=${HOLDFAST_SANITIZE} -fno-omit-frame-pointer)
  # Instrumented code hides from GCC what it needs to tell these two apart from the real thing.
  target_compile_options(holdfast_options INTERFACE -Wno-free-nonheap-object -Wno-maybe-uninitialized)
  target_link_options(holdfast_options INTERFACE -fsanitize=${HOLDFAST_SANITIZE})
endif()
if(HOLDFAST_TESTS)
  # Tests run the release build with its assertions.
  string(REPLACE "-DNDEBUG" "" CMAKE_CXX_FLAGS_RELEASE "${CMAKE_CXX_FLAGS_RELEASE}")
  string(REPLACE "-DNDEBUG" "" CMAKE_CXX_FLAGS_RELWITHDEBINFO "${CMAKE_CXX_FLAGS_RELWITHDEBINFO}")
endif()

# holdfast_library(NAME FOLDER...): a static library of all sources of the folders (not of folders below them).
function(holdfast_library name)
  set(sources)
  foreach(folder IN LISTS ARGN)
    file(GLOB found CONFIGURE_DEPENDS ${CMAKE_CURRENT_SOURCE_DIR}/${folder}/*.cpp)
    list(APPEND sources ${found})
  endforeach()
  add_library(${name} STATIC ${sources})
  set_target_properties(${name} PROPERTIES LINKER_LANGUAGE CXX)
  target_link_libraries(${name} PUBLIC holdfast_options)
endfunction()

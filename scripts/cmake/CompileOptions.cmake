# sagitta_options: warnings and sanitizers for first-party targets only.
add_library(sagitta_options INTERFACE)
target_include_directories(sagitta_options INTERFACE "${PROJECT_SOURCE_DIR}")
target_compile_options(sagitta_options INTERFACE
  -Wall -Wextra -Wpedantic -Wshadow -Wconversion -Wsign-conversion
  -Wold-style-cast -Wnon-virtual-dtor -Wdouble-promotion -Wformat=2)
if(SAGITTA_DEVELOPER_MODE)
  target_compile_options(sagitta_options INTERFACE -Werror)
endif()
# GCC 12 at -O3 takes inlined std::optional for uninitialised and sees overlapping copies in
# std::string's operator+ (GCC bug 105329); the Debug presets and the sanitizers look for real ones.
if(CMAKE_CXX_COMPILER_ID STREQUAL "GNU" AND NOT CMAKE_BUILD_TYPE STREQUAL "Debug")
  target_compile_options(sagitta_options INTERFACE -Wno-maybe-uninitialized -Wno-restrict)
endif()
if(CMAKE_BUILD_TYPE STREQUAL "Debug")
  target_compile_definitions(sagitta_options INTERFACE _GLIBCXX_ASSERTIONS)
endif()
if(SAGITTA_SANITIZERS)
  if(SAGITTA_SANITIZERS MATCHES "thread" AND SAGITTA_SANITIZERS MATCHES "address")
    message(FATAL_ERROR "thread and address sanitizers exclude each other")
  endif()
  target_compile_options(sagitta_options INTERFACE
    -fsanitize=${SAGITTA_SANITIZERS} -fno-sanitize-recover=all -fno-omit-frame-pointer)
  target_link_options(sagitta_options INTERFACE -fsanitize=${SAGITTA_SANITIZERS})
endif()
if(SAGITTA_LIBFUZZER)
  target_compile_options(sagitta_options INTERFACE -fsanitize=fuzzer-no-link)
endif()

# sagitta_library(<folder> SOURCES ... LINKS ...): the static library of one folder.
# Its link line is the list of folders and packages that the folder may use.
function(sagitta_library name)
  cmake_parse_arguments(arg "" "" "SOURCES;LINKS" ${ARGN})
  add_library(sagitta_${name} STATIC ${arg_SOURCES})
  target_include_directories(sagitta_${name} PUBLIC "${PROJECT_SOURCE_DIR}")
  target_link_libraries(sagitta_${name} PUBLIC ${arg_LINKS} PRIVATE sagitta_options)
endfunction()

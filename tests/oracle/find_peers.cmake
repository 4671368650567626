# The general-purpose solvers that serve as oracles and as the other side of benchmarks. Each is optional: the library
# targets peer_cholmod_solver and peer_mumps_solver exist where the solver was found.
include_guard(GLOBAL)

find_path(CHOLMOD_INCLUDE_DIR cholmod.h PATH_SUFFIXES suitesparse)
find_library(CHOLMOD_LIBRARY cholmod)
find_path(MUMPS_INCLUDE_DIR dmumps_c.h)
find_library(MUMPS_LIBRARY dmumps_seq)
find_library(MUMPS_MPI_LIBRARY mpiseq_seq)

if(CHOLMOD_INCLUDE_DIR AND CHOLMOD_LIBRARY)
  add_library(peer_cholmod_solver STATIC ${CMAKE_CURRENT_LIST_DIR}/cholmod_solver.cpp)
  target_include_directories(peer_cholmod_solver SYSTEM PRIVATE ${CHOLMOD_INCLUDE_DIR})
  target_include_directories(peer_cholmod_solver PUBLIC ${PROJECT_SOURCE_DIR}/tests)
  target_link_libraries(peer_cholmod_solver PUBLIC stanchion ${CHOLMOD_LIBRARY})
else()
  message(STATUS "CHOLMOD not found (libsuitesparse-dev): its oracle tests and benchmark are left out")
endif()

if(MUMPS_INCLUDE_DIR AND MUMPS_LIBRARY AND MUMPS_MPI_LIBRARY)
  add_library(peer_mumps_solver STATIC ${CMAKE_CURRENT_LIST_DIR}/mumps_solver.cpp)
  target_include_directories(peer_mumps_solver SYSTEM PRIVATE ${MUMPS_INCLUDE_DIR})
  target_include_directories(peer_mumps_solver PUBLIC ${PROJECT_SOURCE_DIR}/tests)
  target_link_libraries(peer_mumps_solver PUBLIC stanchion ${MUMPS_LIBRARY} ${MUMPS_MPI_LIBRARY})
else()
  message(STATUS "sequential MUMPS not found (libmumps-seq-dev): its oracle tests and benchmark are left out")
endif()

# One source, three instruction sets: chosen when the program starts.
set_source_files_properties(equations/kernel_avx512.cpp PROPERTIES COMPILE_OPTIONS "-mavx512f;-mavx512dq;-mfma")
set_source_files_properties(equations/kernel_avx2.cpp PROPERTIES COMPILE_OPTIONS "-mavx2;-mfma")

#pragma once

// Loops marked so are compiled for several instruction sets; the processor picks. No fused multiply-add is
// allowed (-ffp-contract=off), so all versions give the same bits.
#if defined(__GNUC__) && !defined(__clang__) && defined(__x86_64__) && !defined(__SANITIZE_ADDRESS__)
#define TROTLINE_VECTORISED __attribute__((target_clones("arch=x86-64-v4", "arch=x86-64-v3", "default")))
#else
#define TROTLINE_VECTORISED
#endif

#include <cstdio>

#include "stillmass/base/version.hpp"

int main() { std::puts(stillmass::base::version().data()); }

package ident

// reserved are the lower-case words that C or C++ keeps for itself, and the
// macros of the standard headers that generated code includes. Sources: ISO/IEC
// 9899:2024 6.4.1, ISO/IEC 14882:2023 [lex.key] and [lex.digraph]; the macros
// are those of stdbool.h, stddef.h, errno.h and stdio.h.
var reserved = words(
	// C
	"alignas", "alignof", "auto", "bool", "break", "case", "char", "const", "constexpr", "continue", "default", "do",
	"double", "else", "enum", "extern", "false", "float", "for", "goto", "if", "inline", "int", "long", "nullptr",
	"register", "restrict", "return", "short", "signed", "sizeof", "static", "static_assert", "struct", "switch",
	"thread_local", "true", "typedef", "typeof", "typeof_unqual", "union", "unsigned", "void", "volatile", "while",
	// C++
	"and", "and_eq", "asm", "bitand", "bitor", "catch", "char16_t", "char32_t", "char8_t", "class", "co_await",
	"co_return", "co_yield", "compl", "concept", "const_cast", "consteval", "constinit", "decltype", "delete",
	"dynamic_cast", "explicit", "export", "friend", "mutable", "namespace", "new", "noexcept", "not", "not_eq",
	"operator", "or", "or_eq", "private", "protected", "public", "reinterpret_cast", "requires", "static_cast",
	"template", "this", "throw", "try", "typeid", "typename", "using", "virtual", "wchar_t", "xor", "xor_eq",
	// macros and type names of the headers
	"assert", "errno", "stdin", "stdout", "stderr", "offsetof", "unix", "linux",
	"int8_t", "int16_t", "int32_t", "int64_t", "uint8_t", "uint16_t", "uint32_t", "uint64_t", "size_t", "ptrdiff_t",
)

func words(list ...string) map[string]bool {
	out := make(map[string]bool, len(list))
	for _, w := range list {
		out[w] = true
	}
	return out
}

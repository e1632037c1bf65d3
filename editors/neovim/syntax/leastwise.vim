" Made from the table of keywords of the language; see grammar/tests/vim_syntax.rs.
if exists('b:current_syntax')
  finish
endif

" Keywords begin an item in the first column only.
syntax match leastwiseItem /^\%(\%(cyclic\|broken\)\s\+\)\?\%(system\|coordinate\|parameter\|input\|index\|let\|function\|assume\|kinetic\|potential\|lagrangian\|dissipation\|force\|constraint\|symmetry\|conserved\|run\|include\)\>/
syntax keyword leastwiseClause on in
syntax match leastwiseOption /[,:]\s*\zs\%(dimensionless\|with\|from\|over\|until\)\>/
syntax keyword leastwiseFunction sin cos tan asin acos atan atan2 sinh cosh tanh exp log sqrt abs sign min max norm dot cross transpose diag turn spin momentum sum
syntax keyword leastwiseConstant t π ε ex ey ez energy pi eps
syntax match leastwiseNumber /\<\d\+\%(\.\d\+\)\?\%([eE][+-]\?\d\+\)\?/
syntax match leastwiseOperator /->\|→\|[-+*\/^=<>≤≥≠·×√|]/
syntax region leastwiseText start=/"/ end=/"/ oneline
syntax match leastwiseComment /#.*$/ contains=@Spell

highlight default link leastwiseItem Keyword
highlight default link leastwiseClause Keyword
highlight default link leastwiseOption Keyword
highlight default link leastwiseFunction Function
highlight default link leastwiseConstant Constant
highlight default link leastwiseNumber Number
highlight default link leastwiseOperator Operator
highlight default link leastwiseText String
highlight default link leastwiseComment Comment

let b:current_syntax = 'leastwise'

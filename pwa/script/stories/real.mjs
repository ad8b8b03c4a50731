// The same page against the real program: bin/wakeback serve --demo.
export const stories = {};

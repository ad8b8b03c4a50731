export const stories = {};

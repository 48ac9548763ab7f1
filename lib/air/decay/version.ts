/** Names the method that made an estimate; a change of figures is a new version. */
export const METHOD_VERSION = 'decay-2'

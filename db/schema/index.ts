export * from './people.ts'
export * from './things.ts'
export * from './work.ts'

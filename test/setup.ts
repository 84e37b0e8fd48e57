import fc from 'fast-check'
import { nightly } from './needs.js'

// The same cases in every run of `npm test`: a law that fails now and then would teach nobody
// anything. Nightly looks further, with a seed that its report names.
if (!nightly) fc.configureGlobal({ seed: 1 })

import { DEMO_SIGN_INS } from '#seeds/demo-sign-ins.ts'
import { env } from '../env.server.ts'

export interface DemoSignIn {
  name: string
  email: string
  role: string
  password: string
}

/** The sign-ins that the sign-in page offers: the demo's people in demo mode, nothing otherwise. */
export function listDemoSignIns(): DemoSignIn[] {
  return env().DEMO
    ? DEMO_SIGN_INS.map(({ name, email, role, password }) => ({ name, email, role, password }))
    : []
}

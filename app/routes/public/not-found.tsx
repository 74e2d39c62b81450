import { data } from 'react-router'

export function loader() {
  throw data({ message: 'There is no page at this address.' }, { status: 404 })
}

export const action = loader

export default function NotFound() {
  return null
}
